import { readdirSync } from "node:fs";
import path from "node:path";
import type { ShapefileParts } from "@rainreckon/formats";

const PARTS = ["dbf", "prj", "cpg"] as const;

/** The files beside a .shp that have its name, whatever the case of their endings; none for any other file. */
export function shapefileParts(file: string): ShapefileParts {
  if (path.extname(file).toLowerCase() !== ".shp") return {};
  const folder = path.dirname(file);
  const stem = path.basename(file, path.extname(file));
  const names = namesIn(folder);
  const found: Partial<Record<(typeof PARTS)[number], string>> = {};
  for (const part of PARTS) {
    const name = names.find(
      (candidate) =>
        candidate.toLowerCase() === `${stem}.${part}`.toLowerCase() && candidate.startsWith(stem),
    );
    if (name !== undefined) found[part] = path.join(folder, name);
  }
  return found;
}

function namesIn(folder: string): string[] {
  try {
    return readdirSync(folder).sort();
  } catch {
    return [];
  }
}
