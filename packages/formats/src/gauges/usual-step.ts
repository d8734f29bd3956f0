/**
 * The commonest difference between neighbouring stamps, the shorter one of equals.
 *
 * @param sortedEpochMs - ascending
 * @returns undefined with fewer than two different stamps
 */
export function usualStepMs(sortedEpochMs: Float64Array): number | undefined {
  const counts = new Map<number, number>();
  for (let index = 1; index < sortedEpochMs.length; index++) {
    const step = sortedEpochMs[index] - sortedEpochMs[index - 1];
    if (step > 0) counts.set(step, (counts.get(step) ?? 0) + 1);
  }
  let best: number | undefined;
  let bestCount = 0;
  for (const [step, count] of counts) {
    if (count > bestCount || (count === bestCount && best !== undefined && step < best)) {
      best = step;
      bestCount = count;
    }
  }
  return best;
}
