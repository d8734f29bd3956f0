import { basename, extname } from "node:path";
import { InputError } from "@rainreckon/core";
import { displayText } from "./display-text.ts";
import type { GaugeFileSpec } from "./gauge-file-spec.ts";

/** What may part a label from what it labels, beside blanks. */
const SEPARATORS = /^[\s:=;,|\t"']+/;
const MAX_ID_LENGTH = 200;

/**
 * The id of the one gauge of a file, from the file's name.
 *
 * @param pattern - the name without its ending: {id} is the id, the shortest that fits; * is anything
 * @throws InputError where the name does not fit
 */
export function idOfFileName(path: string, pattern: string): string {
  const stem = basename(path, extname(path));
  const source = pattern
    .split(/(\{id\}|\*+)/)
    .map((part) => (part === "{id}" ? "(.+?)" : part.startsWith("*") ? ".*" : escapeForRegExp(part)))
    .join("");
  const id = new RegExp(`^${source}$`, "su").exec(stem)?.[1]?.trim() ?? "";
  if (id !== "") return id;
  throw new InputError(
    `the file's name does not fit the pattern "${displayText(pattern, 80)}"`,
    path,
    "mend fileName, or leave the file out",
  );
}

/**
 * The id of the one gauge of a file, from what follows a label in a line above the header.
 *
 * @throws InputError where no line holds the label
 */
export function idOfLabel(lines: readonly string[], label: string, path: string): string {
  for (const line of lines) {
    const text = line.replace(/^[\s#"';,/*-]+/, "");
    if (!text.toLowerCase().startsWith(label.toLowerCase())) continue;
    const rest = text.slice(label.length);
    // "Station 12" and "Station: 12", but not "Stationary".
    if (!SEPARATORS.test(rest)) continue;
    const id = (rest.replace(SEPARATORS, "").split(/[;,\t|"]/)[0] ?? "").trim();
    if (id !== "" && id.length <= MAX_ID_LENGTH) return id;
  }
  throw new InputError(
    `no line above the header begins with "${displayText(label, 60)}" and an id`,
    path,
    "check label and headerLine",
  );
}

/** The id that holds for the whole file; undefined where rows or columns name the gauges. */
export function idOfWholeFile(
  spec: Pick<GaugeFileSpec, "idFrom" | "fileName" | "label">,
  path: string,
  linesAbove: readonly string[],
): string | undefined {
  if (spec.idFrom === "file") return idOfFileName(path, spec.fileName ?? "{id}");
  if (spec.idFrom === "label") return idOfLabel(linesAbove, spec.label ?? "", path);
  return undefined;
}

function escapeForRegExp(text: string): string {
  return text.replace(/[.*+?^${}()|[\]\\/]/g, "\\$&");
}
