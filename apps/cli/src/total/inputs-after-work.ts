import type { ManifestInput } from "../manifest.ts";
import type { JobRadar, SweepFault } from "./job.ts";

/**
 * What became of each input once all of it was decoded: a scan whose sweeps failed has the reasons with it, and
 * was left out where none of its sweeps is left.
 *
 * @param inputs - as they stood when only headers had been read
 */
export function inputsAfterWork(
  inputs: readonly ManifestInput[],
  radars: readonly JobRadar[],
  faults: readonly SweepFault[],
): ManifestInput[] {
  const sweepsOf = new Map<string, number>();
  for (const { name } of radars.flatMap(({ rounds }) => rounds.flatMap(({ sweeps }) => sweeps)))
    sweepsOf.set(name, (sweepsOf.get(name) ?? 0) + 1);
  return inputs.map((input) => {
    const own = faults.filter(({ file }) => file === input.path);
    if (own.length === 0) return input;
    const reasons = new Set([
      ...(input.reason === undefined ? [] : [input.reason]),
      ...own.map(({ what }) => what),
    ]);
    const use = own.length >= (sweepsOf.get(input.path) ?? 0) ? "left out" : input.use;
    return { ...input, use, reason: [...reasons].join("; ") };
  });
}
