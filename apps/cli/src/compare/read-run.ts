import { readFileSync, statSync } from "node:fs";
import path from "node:path";
import { InputError } from "@rainreckon/core";
import { type Manifest, manifestSchema } from "../manifest.ts";
import { ownCsvRows } from "./own-csv.ts";

/** Larger than any table that a run writes; what exceeds it is not ours. */
const MAX_FILE_BYTES = 256 * 1024 * 1024;

/** What `compare` looks at in the folder of a run. */
export interface Run {
  readonly folder: string;
  readonly manifest: Manifest;
  /** Rows by column name; undefined where the run wrote no such table. */
  readonly catchments?: readonly Readonly<Record<string, string>>[];
  readonly gauges?: readonly Readonly<Record<string, string>>[];
  readonly scores?: unknown;
}

/** @throws InputError (kind "usage") where the folder is not that of a finished run */
export function readRun(folder: string): Run {
  const manifestPath = path.join(folder, "manifest.json");
  if (statSync(folder, { throwIfNoEntry: false })?.isDirectory() !== true) {
    throw new InputError("there is no such folder", folder, "name two folders that total has written", {
      kind: "usage",
    });
  }
  const text = readIfThere(manifestPath);
  if (text === undefined) {
    throw new InputError(
      "this folder holds no finished run: it has no manifest.json",
      folder,
      "name a folder that total has written to its end",
      {
        kind: "usage",
      },
    );
  }
  const manifest = manifestSchema.safeParse(parseJson(text, manifestPath));
  if (!manifest.success) {
    const issue = manifest.error.issues[0];
    throw new InputError(
      `this is no manifest of a run (${issue?.path.join(".") || "top level"}: ${issue?.message})`,
      manifestPath,
      "name a folder that this version of total has written",
      { kind: "usage" },
    );
  }
  const catchments = readIfThere(path.join(folder, "catchments.csv"));
  const gauges = readIfThere(path.join(folder, "gauges.csv"));
  const scoresPath = path.join(folder, "scores.json");
  const scores = readIfThere(scoresPath);
  return {
    folder,
    manifest: manifest.data,
    ...(catchments === undefined ? {} : { catchments: ownCsvRows(catchments) }),
    ...(gauges === undefined ? {} : { gauges: ownCsvRows(gauges) }),
    ...(scores === undefined ? {} : { scores: parseJson(scores, scoresPath) }),
  };
}

function readIfThere(file: string): string | undefined {
  const stat = statSync(file, { throwIfNoEntry: false });
  if (stat === undefined) return undefined;
  if (!stat.isFile() || stat.size > MAX_FILE_BYTES) {
    throw new InputError(
      "this is no file that a run has written",
      file,
      "name a folder that total has written",
      { kind: "usage" },
    );
  }
  return readFileSync(file, "utf8");
}

function parseJson(text: string, file: string): unknown {
  try {
    return JSON.parse(text);
  } catch (cause) {
    throw new InputError(
      "this is no JSON",
      file,
      "name a folder that total has written, or run total again",
      { kind: "usage", cause },
    );
  }
}
