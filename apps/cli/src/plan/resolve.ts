import { readdirSync, statSync } from "node:fs";
import path from "node:path";
import type { Notice } from "@rainreckon/core";
import { glob, isDynamicPattern } from "tinyglobby";

/**
 * Files that a plan's paths and globs stand for, as absolute paths in code-unit order, each once.
 *
 * A path that names an existing file is taken at its word, even where it holds characters that a glob
 * would read otherwise. A link that the plan itself names is followed, one met while searching is not. What
 * matches nothing goes to `onNotice`.
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
    const matches = isDynamicPattern(pattern) ? await search(pattern, folder) : [];
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

/** Files that match a glob. Its plain leading folders are gone to first, so that a link among them is no search. */
async function search(pattern: string, folder: string): Promise<string[]> {
  const segments = pattern.split("/");
  const first = segments.findIndex((segment) => isDynamicPattern(segment));
  const named = segments.slice(0, first).join("/").replace(/\\(.)/g, "$1");
  return await glob(segments.slice(first).join("/"), {
    cwd: path.resolve(folder, pattern.startsWith("/") ? `/${named}` : named),
    absolute: true,
    followSymbolicLinks: false,
    expandDirectories: false,
  });
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
