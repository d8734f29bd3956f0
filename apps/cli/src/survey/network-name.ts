import path from "node:path";
import type { Guessed } from "./findings.ts";

const PLAIN_WORDS = new Set([
  "gauge",
  "gauges",
  "rain",
  "rainfall",
  "reading",
  "readings",
  "data",
  "tips",
  "csv",
  "min",
  "mm",
  "series",
]);

/**
 * A name for the network of a gauge file, from the file's name without dates and plain words, else from its
 * folder.
 *
 * @param ofOneGauge - whether the file is of one gauge: its name is then the gauge's, and only the folder tells
 */
export function networkName(file: string, ofOneGauge = false): Guessed<string> {
  const own = telling(path.basename(file, path.extname(file)));
  if (own !== "" && !ofOneGauge) return guessed(own, "by the file's name");
  const folder = telling(path.basename(path.dirname(path.resolve(file))));
  if (folder !== "") return guessed(folder, "by the folder's name");
  return guessed("gauges", "neither file nor folder names a network");
}

function telling(name: string): string {
  return name
    .split(/[\s_.-]+/)
    .filter((word) => word !== "" && !/\d/.test(word) && !PLAIN_WORDS.has(word.toLowerCase()))
    .join("-");
}

function guessed(value: string, reason: string): Guessed<string> {
  return { value, standing: "guessed", reason };
}
