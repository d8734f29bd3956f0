import path from "node:path";
import { InputError } from "@rainreckon/core";
import type { ArchiveEntry } from "@rainreckon/formats";
import type { ManifestInput } from "../manifest.ts";
import type { LoadedPlan } from "../plan/load.ts";

/** The plan and all inputs of a run under their own folder, so that the plan finds them as it did. */
export interface BundledInputs {
  readonly entries: readonly ArchiveEntry[];
  /** Where the plan lies in the archive. */
  readonly plan: string;
  /** Where an input lies in the archive, by its name in the manifest. */
  readonly nameOf: (input: string) => string;
}

/**
 * Puts the plan and its inputs below one folder, as far above the plan as its paths reach.
 *
 * @throws InputError (kind "usage") where the plan names files by absolute paths, which hold on one machine only
 */
export function bundledInputs(
  loaded: LoadedPlan,
  inputs: readonly ManifestInput[],
  below: string,
): BundledInputs {
  refuseAbsolute(loaded);
  const files = inputs.map(({ path: name }) => path.resolve(loaded.folder, name));
  let top = loaded.folder;
  while (files.some((file) => path.relative(top, file).startsWith(".."))) top = path.dirname(top);
  const nameIn = (file: string) => [below, ...path.relative(top, file).split(path.sep)].join("/");
  return {
    entries: [
      { name: nameIn(loaded.path), path: loaded.path },
      ...files.map((file) => ({ name: nameIn(file), path: file })),
    ],
    plan: nameIn(loaded.path),
    nameOf: (input) => nameIn(path.resolve(loaded.folder, input)),
  };
}

function refuseAbsolute({ plan, path: planPath }: LoadedPlan): void {
  const named = [
    ...plan.scans,
    ...plan.grids.flatMap(({ files }) => files),
    ...plan.gauges.flatMap(({ files, stations }) => [
      ...files,
      ...(stations === undefined ? [] : [stations.file]),
    ]),
    ...[plan.catchments?.file, plan.assets?.file, plan.echo.blockage.terrain].filter(
      (file) => file !== undefined,
    ),
  ];
  const absolute = named.find((file) => path.isAbsolute(file));
  if (absolute === undefined) return;
  throw new InputError(
    "a bundle must be made again elsewhere, and this plan names a file by an absolute path",
    `${planPath}: ${absolute}`,
    "write paths relative to the plan, and run total again",
    { kind: "usage" },
  );
}
