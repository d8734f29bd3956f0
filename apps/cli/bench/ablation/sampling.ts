import type { TrueWorld } from "./worlds.ts";

/**
 * Depths that scans with no fault at all would give: the true rain below the gates of the lowest sweeps, each round
 * standing for the time to the next. What is missing of the truth here is owed to scanning every few minutes and to
 * gates that are not cells, and no correction of echo brings it back. Shape [cells].
 */
export function samplingAlone({ grid, window, radars }: TrueWorld): Float32Array {
  const cellCount = grid.nx * grid.ny;
  const sumMm = new Float64Array(cellCount);
  const weightSum = new Float64Array(cellCount);
  const hours = (Date.parse(window.to) - Date.parse(window.from)) / 3_600_000;
  for (const radar of radars) {
    const { cells, start, gates, weight } = radar.lowest;
    const lowestDeg = Math.min(...radar.sweeps.map(({ elevationDeg }) => elevationDeg));
    const lowest = radar.sweeps.flatMap(({ elevationDeg }, k) => (elevationDeg === lowestDeg ? [k] : []));
    for (const sweep of lowest) {
      const rate = radar.rateMmPerHour(sweep);
      for (let k = 0; k < cells.length; k++) {
        let sum = 0;
        for (let at = start[k]; at < start[k + 1]; at++) sum += rate[gates[at]];
        const share = weight[cells[k]] / lowest.length;
        sumMm[cells[k]] += (share * sum * hours) / (start[k + 1] - start[k]);
        weightSum[cells[k]] += share;
      }
    }
  }
  return Float32Array.from(sumMm, (mm, cell) => mm / weightSum[cell]);
}
