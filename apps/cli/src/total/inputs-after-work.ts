import type { ManifestInput } from "../manifest.ts";
import type { RunShape, SweepFault } from "./job.ts";

/**
 * What became of each input once all of it was decoded: a file whose sweeps or layers failed has the reasons with
 * it, and was left out where none of them is left.
 *
 * @param inputs - as they stood when only headers had been read
 */
export function inputsAfterWork(
  inputs: readonly ManifestInput[],
  { radars, grids }: Pick<RunShape, "radars" | "grids">,
  faults: readonly SweepFault[],
): ManifestInput[] {
  const sweepsOf = new Map<string, number>();
  const pieces = [
    ...radars.flatMap(({ rounds }) => rounds.flatMap(({ sweeps }) => sweeps)),
    ...grids.flatMap(({ rounds }) => rounds),
  ];
  for (const { name } of pieces) sweepsOf.set(name, (sweepsOf.get(name) ?? 0) + 1);
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
