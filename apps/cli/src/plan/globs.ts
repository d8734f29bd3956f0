import path from "node:path";
import { escapePath } from "tinyglobby";
import type { FoundFile } from "../survey/walk.ts";

/**
 * Globs and paths that stand for exactly the files wanted, as seen from a folder.
 *
 * A whole root goes as one glob where nothing else in it has that ending; else each folder for itself; and
 * where other files share the ending there too, file by file. So files that arrive later are found as well,
 * and files that are no scans stay out.
 *
 * @param wanted - absolute paths
 * @param all - everything that was found
 * @param from - the folder that the globs count from
 */
export function globsFor(wanted: readonly string[], all: readonly FoundFile[], from: string): string[] {
  const wantedSet = new Set(wanted);
  const found = all.map((file) => ({ path: path.resolve(file.path), root: path.resolve(file.root) }));
  const globs: string[] = [];
  const settled = new Set<string>();
  const groups: ((file: { path: string; root: string }) => { folder: string; deep: boolean })[] = [
    (file) => ({ folder: file.root, deep: true }),
    (file) => ({ folder: path.dirname(file.path), deep: false }),
  ];
  for (const place of groups) {
    const byPlace = new Map<string, { folder: string; deep: boolean; ending: string; members: string[] }>();
    for (const file of found) {
      // A root that is a file itself was named on purpose: it stays a path of its own at this stage.
      if (file.root === file.path && place === groups[0]) continue;
      const { folder, deep } = place(file);
      const ending = path.extname(file.path);
      const key = `${folder}\u0000${ending}`;
      const group = byPlace.get(key) ?? { folder, deep, ending, members: [] };
      byPlace.set(key, group);
      group.members.push(file.path);
    }
    for (const { folder, deep, ending, members } of byPlace.values()) {
      const open = members.filter((member) => !settled.has(member));
      const fits = ending !== "" && open.length > 1 && members.every((member) => wantedSet.has(member));
      if (!fits) continue;
      globs.push(asGlob(folder, deep ? members : [], ending, from));
      for (const member of members) settled.add(member);
    }
  }
  const single = wanted.filter((file) => !settled.has(file)).map((file) => relativePath(file, from));
  return [...new Set([...globs.sort(), ...single.sort()])];
}

function asGlob(folder: string, members: readonly string[], ending: string, from: string): string {
  const folders = new Set(members.map((member) => path.dirname(member)));
  const base = escapePath(relativePath(folder, from));
  const prefix = base === "" ? "" : `${base}/`;
  const deep = folders.size > 1 || (folders.size === 1 && !folders.has(folder));
  return `${prefix}${deep ? "**/" : ""}*${escapePath(ending)}`;
}

/** A path as seen from a folder, with forward slashes. */
export function relativePath(file: string, from: string): string {
  return path.relative(from, file).split(path.sep).join("/");
}
