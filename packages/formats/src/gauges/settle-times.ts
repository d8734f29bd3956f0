import type { FileNotices } from "./file-notices.ts";
import type { GaugeFileCounts } from "./gauge-file-counts.ts";
import { indices, pick, placesOfNumbers } from "./picking.ts";
import type { Track } from "./track.ts";
import { usualStepMs } from "./usual-step.ts";

/** Neighbouring stamps of one repeated hour are never further apart than this. */
const MAX_WITHIN_REPEATED_HOUR_MS = 3 * 3_600_000;

/** Rows of a track in order of time: `rows[k]` is a row of the file, `epochMs[k]` its settled instant. */
export interface SettledTimes {
  readonly rows: Uint32Array;
  readonly epochMs: Float64Array;
}

/**
 * Settles what instant each stamp means, and puts the rows in order.
 *
 * Stamps in a repeated hour are told apart by the order of the file: where the rows are otherwise in order
 * and the clock is seen to go back exactly once, the rows before are the first pass and the rest the
 * second. In hourly data the same stamp twice running says as much. Everything else is left out.
 *
 * A file that runs from the newest row to the oldest is as good as one in order.
 *
 * @param coversStep - whether a row covers a step of time, and is not an instant
 */
export function settleTimes(
  track: Track,
  coversStep: boolean,
  counts: GaugeFileCounts,
  notices: FileNotices,
): SettledTimes {
  const epochMs = track.epochMs.view().slice();
  const visit = visitingOrder(epochMs);
  resolveRepeatedHours(track, epochMs, visit, coversStep, counts, notices);

  const kept = placesOfNumbers(epochMs, visit);
  let latest = Number.NEGATIVE_INFINITY;
  let disorder = false;
  for (let index = 0; index < kept.length; index++) {
    const row = kept[index];
    if (epochMs[row] >= latest) {
      latest = epochMs[row];
      continue;
    }
    disorder = true;
    counts.outOfOrder += 1;
    notices.tell(
      "rows out of order",
      "this row is earlier than the one before",
      track.path,
      [track.line.view()[row]],
      "nothing to do: the rows were sorted",
    );
  }
  if (disorder) {
    // Rows of one instant stay in the order in which they were visited.
    const direction = visit[0] > visit[visit.length - 1] ? -1 : 1;
    kept.sort((a, b) => epochMs[a] - epochMs[b] || direction * (a - b));
  }
  return { rows: kept, epochMs: pick(epochMs, kept) };
}

function visitingOrder(epochMs: Float64Array): Uint32Array {
  let rises = 0;
  let falls = 0;
  for (let row = 1; row < epochMs.length; row++) {
    if (epochMs[row] > epochMs[row - 1]) rises++;
    else if (epochMs[row] < epochMs[row - 1]) falls++;
  }
  const order = indices(epochMs.length);
  return falls > rises ? order.reverse() : order;
}

function resolveRepeatedHours(
  track: Track,
  epochMs: Float64Array,
  visit: Uint32Array,
  coversStep: boolean,
  counts: GaugeFileCounts,
  notices: FileNotices,
): void {
  if (track.laterMs.size === 0) return;
  const certainMs = epochMs.slice();
  for (const row of track.laterMs.keys()) certainMs[row] = Number.NaN;
  const certain = pick(certainMs, placesOfNumbers(certainMs, visit));
  const inOrder = certain.every((time, index) => index === 0 || time >= certain[index - 1]);
  const stepMs = usualStepMs(certain) ?? 0;
  for (const run of runsOfRepeatedStamps(track, epochMs, visit)) {
    const secondPass = inOrder ? startOfSecondPass(run, track, epochMs, stepMs) : undefined;
    if (secondPass === undefined) {
      leaveOut(run, track, epochMs, coversStep ? stepMs : 0, counts, notices);
      continue;
    }
    counts.repeatedHourResolved += run.length;
    for (const row of run.slice(secondPass)) epochMs[row] = track.laterMs.get(row)!;
  }
}

function runsOfRepeatedStamps(track: Track, epochMs: Float64Array, visit: Uint32Array): number[][] {
  const runs: number[][] = [];
  let run: number[] = [];
  for (const row of visit) {
    const last = run[run.length - 1];
    const repeated = track.laterMs.has(row);
    const joins =
      repeated && last !== undefined && Math.abs(epochMs[row] - epochMs[last]) <= MAX_WITHIN_REPEATED_HOUR_MS;
    if (joins) run.push(row);
    else {
      if (run.length > 0) runs.push(run);
      run = repeated ? [row] : [];
    }
  }
  if (run.length > 0) runs.push(run);
  return runs;
}

/** Where in the run the clock went back, if that is seen exactly once. */
function startOfSecondPass(
  run: readonly number[],
  track: Track,
  epochMs: Float64Array,
  stepMs: number,
): number | undefined {
  let start: number | undefined;
  for (let index = 1; index < run.length; index++) {
    const change = epochMs[run[index]] - epochMs[run[index - 1]];
    const repeatedMs = track.laterMs.get(run[index])! - epochMs[run[index]];
    // At shorter steps, the same stamp twice is a row that was written twice.
    const wentBack = change < 0 || (change === 0 && stepMs >= repeatedMs);
    if (!wentBack) continue;
    if (start !== undefined) return undefined;
    start = index;
  }
  return start;
}

function leaveOut(
  run: readonly number[],
  track: Track,
  epochMs: Float64Array,
  reachMs: number,
  counts: GaugeFileCounts,
  notices: FileNotices,
): void {
  counts.repeatedHourLeftOut += run.length;
  let startEpochMs = Number.POSITIVE_INFINITY;
  let endEpochMs = Number.NEGATIVE_INFINITY;
  for (const row of run) {
    startEpochMs = Math.min(startEpochMs, epochMs[row] - Math.max(reachMs, 1));
    endEpochMs = Math.max(endEpochMs, track.laterMs.get(row)! + reachMs);
    epochMs[row] = Number.NaN;
    notices.tell(
      "stamps in an hour that the clock repeats",
      "this stamp falls in the hour that the clock repeats, and the order of the rows does not tell which is meant: left out",
      track.path,
      [track.line.view()[row]],
      "write stamps with Z or an offset",
    );
  }
  track.uncertain.push({ startEpochMs, endEpochMs });
}
