import { createHash } from "node:crypto";
import { readFileSync } from "node:fs";
import { join } from "node:path";
import { gunzipSync } from "node:zlib";

/**
 * SHA-256 over what is true of a storm: truth.json (which for a world holds a digest of all scans too), the
 * total, and the one-minute rates unpacked, so that another version of zlib does not matter.
 *
 * @param folder - where `generateStorm` wrote
 */
export function truthDigest(folder: string): string {
  const read = (name: string): Buffer => readFileSync(join(folder, "truth", name));
  return createHash("sha256")
    .update(read("truth.json"))
    .update(read("depth_total_mm.f32"))
    .update(gunzipSync(read("rain_rate.u16.gz")))
    .digest("hex");
}
