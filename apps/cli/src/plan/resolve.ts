import { readdirSync, statSync } from "node:fs";
import path from "node:path";
import type { Notice } from "@rainreckon/core";
import { glob, isDynamicPattern } from "tinyglobby";

/**
 * Files that a plan's paths and globs stand for, as absolute paths in code-unit order, each once.
 *
 * A path that names an existing file is taken at its word, even where it holds characters that a glob
 * would read otherwise. Links to folders are not followed. What matches nothing goes to `onNotice`.
 *
 * @param folder - what relative paths start from: the plan's own folder
 */
export async function resolveFiles(
  patterns: readonly string[],
  folder: string,
  onNotice: (notice: Notice) => void,
): Promise<string[]> {
  const found = new Set<string>();
  for (const pattern of patterns) {
    const literal = path.resolve(folder, pattern);
    if (isFile(literal)) {
      found.add(literal);
      continue;
    }
    const matches = isDynamicPattern(pattern)
      ? await glob(pattern, {
          cwd: folder,
          absolute: true,
          followSymbolicLinks: false,
          expandDirectories: false,
        })
      : [];
    if (matches.length === 0) {
      onNotice({
        what: "no file matches",
        where: pattern,
        fix: "mend the path (it counts from the plan's folder) or delete it",
      });
    }
    for (const match of matches) found.add(path.resolve(match));
  }
  return [...found].sort((a, b) => (a < b ? -1 : 1));
}

function isFile(candidate: string): boolean {
  return statSync(candidate, { throwIfNoEntry: false })?.isFile() === true;
}

/** Names of the entries of a folder that look like the one that is missing, to suggest; empty where there is no folder. */
export function namesBeside(missing: string): string[] {
  try {
    return readdirSync(path.dirname(missing));
  } catch {
    return [];
  }
}
