import { depthAreaDuration, stormCentre } from "@rainreckon/accumulation";
import { cellCentre } from "@rainreckon/core";
import { isoUtc } from "../ui/numbers.ts";
import type { RunGrid } from "./run-grid.ts";
import type { EventReport } from "./schema.ts";

const MINUTE_MS = 60_000;

/** Depth–area–duration of the run's grid, and where its storm was centred. */
export function areaDurationOf(
  { grid, map, figure, intervals, bestMm, totalMm }: RunGrid,
  durationsMs: readonly number[],
): EventReport["areaDuration"] {
  const intervalMs = (intervals[0]?.endEpochMs ?? 0) - (intervals[0]?.startEpochMs ?? 0);
  const placeOf = (cell: number) => {
    const { xM, yM } = cellCentre(grid, cell);
    return map.inverse(xM, yM);
  };
  const rows = depthAreaDuration({ grid, intervals, depthMm: bestMm }, durationsMs).map((row) => {
    const [centreLonDeg, centreLatDeg] = placeOf(row.centreCell);
    return {
      durationMinutes: row.durationMs / MINUTE_MS,
      areaKm2: row.areaKm2,
      depthMm: row.depthMm,
      start: isoUtc(row.startEpochMs),
      end: isoUtc(row.endEpochMs),
      centreLatDeg,
      centreLonDeg,
    };
  });
  const centre = stormCentre(grid, totalMm);
  const [lonDeg, latDeg] = placeOf(centre?.deepestCell ?? 0);
  const [rainMiddleLonDeg, rainMiddleLatDeg] = map.inverse(centre?.centroidXM ?? 0, centre?.centroidYM ?? 0);
  return {
    figure,
    intervalMinutes: intervalMs / MINUTE_MS,
    rows,
    centre:
      centre === undefined
        ? null
        : {
            deepestMm: centre.deepestMm,
            cellKm2: (grid.cellM * grid.cellM) / 1e6,
            latDeg,
            lonDeg,
            rainMiddleLatDeg,
            rainMiddleLonDeg,
          },
    words:
      "Largest mean depth over an area of one piece that grows from the deepest cell by its deepest neighbour (house rule), over windows of whole grid intervals; what was not observed takes no part, so a depth is at least what it says.",
  };
}
