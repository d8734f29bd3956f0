import { existsSync } from "node:fs";
import path from "node:path";
import { type Grid, InputError, type Notice } from "@rainreckon/core";
import { readStations } from "@rainreckon/formats";
import { type Projection, projection } from "@rainreckon/mosaic";
import type { ManifestInput } from "../manifest.ts";
import type { LoadedPlan } from "../plan/load.ts";
import type { LeftOutLog } from "../ui/left-out.ts";
import { hashFile } from "./inputs.ts";
import { placePoint, WIDEN_GRID } from "./places.ts";

/**
 * Reads the assets of a plan and checks that each stands on the grid. Nothing is made of them here, which is
 * said: a plan that names them must not look as if its totals held their figures.
 */
export async function checkAssets(
  loaded: LoadedPlan,
  grid: Grid,
  map: Projection,
  log: LeftOutLog,
  seen: (input: ManifestInput) => void,
): Promise<void> {
  const { assets } = loaded.plan;
  if (assets === undefined) return;
  const file = path.resolve(loaded.folder, assets.file);
  const onNotice = (notice: Notice) =>
    log.add("assets", { ...notice, where: notice.where.replace(file, assets.file) });
  let use: "used" | "left out" = "left out";
  try {
    const rows = await readStations(file, assets.columns, onNotice, assets);
    const system = projection(assets.crs);
    for (const row of rows) {
      const [lonDeg, latDeg] = system.geographic ? [row.x, row.y] : system.inverse(row.x, row.y);
      const onEarth = Math.abs(latDeg) <= 90 && Math.abs(lonDeg) <= 360;
      if (onEarth && placePoint(grid, map, { lonDeg, latDeg }, "nearest").cell >= 0) continue;
      onNotice({
        what: onEarth ? `asset ${row.id} lies outside the grid` : `asset ${row.id} is at no place on Earth`,
        where: `${file}, line ${row.line}`,
        fix: `check its coordinates and assets.crs, or ${WIDEN_GRID}`,
      });
    }
    use = "used";
    onNotice({
      what: `${rows.length} assets were read and placed; total writes no figures for them`,
      where: file,
      fix: "nothing to do",
    });
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    onNotice({ what: error.what, where: error.where, fix: error.fix });
  }
  if (!existsSync(file)) return;
  const { name, sha256, bytes } = await hashFile(loaded.folder, file);
  seen({ path: name, kind: "assets", sha256, bytes, use });
}
