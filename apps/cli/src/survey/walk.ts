import { lstatSync, readdirSync, statSync } from "node:fs";
import path from "node:path";
import { InputError, type Notice } from "@rainreckon/core";

/** A file that was found, and the root it was found under. */
export interface FoundFile {
  /** As it will be handed to readers: the root as given, and what follows. */
  readonly path: string;
  readonly root: string;
}

export interface Walk {
  /** In code-unit order of their paths, each once. */
  readonly files: readonly FoundFile[];
  readonly linkCount: number;
  readonly hiddenCount: number;
  /** Folders that could not be read. */
  readonly notices: readonly Notice[];
}

/**
 * All files under the given files and folders.
 *
 * Links inside a folder are counted and not followed, so nothing outside the given roots is ever read and
 * no file is met twice; a root itself may be a link. Names that start with a point are counted, not read.
 *
 * @throws InputError (kind "usage") where a root does not exist
 */
export function walkFiles(roots: readonly string[]): Walk {
  const notices: Notice[] = [];
  const files = new Map<string, FoundFile>();
  let linkCount = 0;
  let hiddenCount = 0;
  const visit = (folder: string, root: string) => {
    let entries: ReturnType<typeof readEntries>;
    try {
      entries = readEntries(folder);
    } catch {
      notices.push({
        what: "the folder cannot be read",
        where: folder,
        fix: "change its permissions to read what lies in it",
      });
      return;
    }
    for (const entry of entries) {
      const place = path.join(folder, entry.name);
      if (entry.isSymbolicLink()) linkCount += 1;
      else if (entry.name.startsWith(".")) hiddenCount += 1;
      else if (entry.isDirectory()) visit(place, root);
      else if (entry.isFile()) files.set(path.resolve(place), { path: place, root });
    }
  };
  for (const root of roots) {
    const stat = statSync(root, { throwIfNoEntry: false });
    if (stat === undefined) {
      const link = lstatSync(root, { throwIfNoEntry: false }) !== undefined;
      const what = link ? "this link leads nowhere" : "there is no such file or folder";
      throw new InputError(what, root, "name files or folders that exist", { kind: "usage" });
    }
    if (stat.isDirectory()) visit(root, root);
    else if (stat.isFile()) files.set(path.resolve(root), { path: root, root });
    else
      throw new InputError("this is neither a file nor a folder", root, "name files or folders", {
        kind: "usage",
      });
  }
  const sorted = [...files.values()].sort((a, b) => (a.path < b.path ? -1 : 1));
  return { files: sorted, linkCount, hiddenCount, notices };
}

function readEntries(folder: string) {
  return readdirSync(folder, { withFileTypes: true });
}
