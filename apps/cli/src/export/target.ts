import { existsSync, mkdirSync, renameSync, rmSync, statSync } from "node:fs";
import path from "node:path";
import { InputError } from "@rainreckon/core";

/**
 * Writes a file beside its name and renames it, so that a broken-off export leaves no half a file.
 *
 * @param replace - whether a file of that name may go
 * @throws InputError (kind "usage") where there is a file already, or the place is the folder of the run
 */
export async function writeTarget(
  file: string,
  { run, replace }: { readonly run: string; readonly replace: boolean },
  write: (draft: string) => Promise<void>,
): Promise<void> {
  refuseRunFolder(file, run);
  const there = statSync(file, { throwIfNoEntry: false });
  if (there?.isDirectory() === true)
    throw usage("a file is written here, and this is a folder", file, "name a file in it");
  if (there !== undefined && !replace)
    throw usage("there is a file already", file, "name another one, or add --force to write over it");
  mkdirSync(path.dirname(path.resolve(file)), { recursive: true });
  const draft = `${file}.part`;
  try {
    await write(draft);
    renameSync(draft, file);
  } finally {
    rmSync(draft, { force: true });
  }
}

/** A folder for several files, made where it is not there. @throws InputError (kind "usage") as {@link writeTarget} */
export function targetFolder(folder: string, run: string): string {
  refuseRunFolder(folder, run);
  if (existsSync(folder) && !statSync(folder).isDirectory())
    throw usage("files are written into a folder, and this is a file", folder, "name a folder");
  mkdirSync(folder, { recursive: true });
  return folder;
}

/** A run stays as total left it: its manifest lists every file. */
function refuseRunFolder(target: string, run: string): void {
  const inside = path.relative(path.resolve(run), path.resolve(target));
  if (inside === ".." || inside.startsWith(`..${path.sep}`) || path.isAbsolute(inside)) return;
  throw usage("the folder of a run stays as total left it", target, "write to another folder");
}

function usage(what: string, where: string, fix: string): InputError {
  return new InputError(what, where, fix, { kind: "usage" });
}
