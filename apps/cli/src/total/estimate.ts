import { megabytes, memberBytes } from "./members.ts";
import type { PreparedRun } from "./prepare.ts";

/** What a run would take; rough, from counts alone. */
export interface RunEstimate {
  readonly hours: number;
  readonly scanFiles: number;
  readonly rounds: number;
  readonly gauges: number;
  readonly catchments: number;
  readonly units: number;
  readonly memoryMb: number;
  readonly diskMb: number;
  /** The most that members take beside that. */
  readonly membersMb: number;
  readonly minutes: number;
}

/** Cost per round and million cells, and per round to decode, on one ordinary core: from the bench, rounded up. */
const SECONDS_PER_ROUND_AND_MCELL = 0.15;
const SECONDS_PER_ROUND = 0.03;
const BASE_MEMORY_MB = 200;

/** Estimates hours, memory, disk and minutes of a run before anything is decoded. */
export function estimate(run: PreparedRun, members: number): RunEstimate {
  const cells = run.grid.nx * run.grid.ny;
  const sourceCount = run.shape.radars.length + run.shape.grids.length;
  const rounds = [...run.shape.radars, ...run.shape.grids].reduce(
    (sum, { rounds }) => sum + rounds.length,
    0,
  );
  // Per cell: interval sums of a unit in float32 and float64, a few open steps and held layers per radar.
  const intervalsPerUnit = Math.max(...run.jobs.map(({ intervals }) => intervals.length));
  const bytesPerCell =
    intervalsPerUnit * (24 + 4 * sourceCount) + 2 * (48 + 8 * sourceCount) + sourceCount * 250;
  const storedBytes = run.intervals.length * cells * (24 + 4 * sourceCount);
  return {
    hours: (run.window.endEpochMs - run.window.startEpochMs) / 3_600_000,
    scanFiles: run.inputs.filter(({ kind, use }) => (kind === "scan" || kind === "grid") && use === "used")
      .length,
    rounds,
    gauges: run.gauges.gauges.length,
    catchments: run.catchments.length,
    units: run.jobs.length,
    memoryMb: Math.ceil(BASE_MEMORY_MB + (cells * bytesPerCell) / 1e6),
    diskMb: Math.ceil(storedBytes / 1e6),
    membersMb: megabytes(memberBytes(run, members)),
    minutes: Math.max(
      1,
      Math.ceil((rounds * (SECONDS_PER_ROUND + (cells / 1e6) * SECONDS_PER_ROUND_AND_MCELL)) / 60),
    ),
  };
}
