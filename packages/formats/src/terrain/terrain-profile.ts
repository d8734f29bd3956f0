import { readFileSync, statSync } from "node:fs";
import { InputError, type TerrainProfile } from "@rainreckon/core";

/** Steps may differ from each other by so much of a step and still count as even. */
const UNEVEN = 0.01;
const MOST_POINTS = 100_000;
/** More bytes than so many points can need. */
const MOST_BYTES = 8_000_000;

/**
 * Terrain along one azimuth from a small CSV file: distance_km, height_asl_m, even steps from the antenna out.
 *
 * @throws InputError (usage) with the line at fault
 */
export function readTerrainProfile(file: string): TerrainProfile {
  const fault = (what: string, line: number, fix: string) =>
    new InputError(what, `${file}, line ${line}`, fix, { kind: "usage" });
  const found = statSync(file, { throwIfNoEntry: false });
  if (found?.isFile() !== true) {
    throw new InputError("there is no such file", file, "name a CSV file of distances and heights", {
      kind: "usage",
    });
  }
  if (found.size > MOST_BYTES) throw fault("too large for a profile", 1, "give 2 to 100,000 points");
  const lines = readFileSync(file, "utf8")
    .replace(/^\ufeff/, "")
    .trimEnd()
    .split(/\r?\n/);
  const columns = (lines[0] ?? "").split(",").map((name) => name.trim());
  const distanceAt = columns.indexOf("distance_km");
  const heightAt = columns.indexOf("height_asl_m");
  if (distanceAt < 0 || heightAt < 0)
    throw fault("no columns distance_km and height_asl_m", 1, "name the columns in the first line");
  if (lines.length < 3 || lines.length > MOST_POINTS)
    throw fault(`${lines.length - 1} points are no profile`, lines.length, "give 2 to 100,000 points");
  const points = lines.slice(1).map((line, k) => {
    const cells = line.split(",").map((cell) => cell.trim());
    const distanceKm = Number(cells[distanceAt] || Number.NaN);
    // An empty height is not known, and hides nothing.
    const heightM = cells[heightAt] === "" ? Number.NaN : Number(cells[heightAt]);
    if (!Number.isFinite(distanceKm) || (cells[heightAt] !== "" && !Number.isFinite(heightM)))
      throw fault(
        "a point without numbers",
        k + 2,
        "write a distance in km and a height in m, or leave the height empty",
      );
    return { distanceKm, heightM };
  });
  const stepKm = (points[1]?.distanceKm ?? 0) - (points[0]?.distanceKm ?? 0);
  const stray = points.findIndex(
    ({ distanceKm }, k) => !(Math.abs(distanceKm - (k + 1) * stepKm) <= UNEVEN * stepKm),
  );
  if (!(stepKm > 0) || stray >= 0) {
    throw fault(
      "distances do not ascend in even steps, the first one step from the antenna",
      Math.max(0, stray) + 2,
      "give points at 1, 2, 3 … steps",
    );
  }
  return { stepM: 1000 * stepKm, heightAslM: Float64Array.from(points, ({ heightM }) => heightM) };
}
