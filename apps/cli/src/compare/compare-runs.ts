import { z } from "zod";
import type { ManifestInput } from "../manifest.ts";
import { type Difference, differences } from "./flatten.ts";
import type { Run } from "./read-run.ts";

const plainValue = z.union([z.string(), z.number(), z.boolean(), z.null()]);
const difference = z.strictObject({ path: z.string(), a: plainValue, b: plainValue });
const runSide = z.strictObject({
  folder: z.string(),
  title: z.string(),
  status: z.string(),
  version: z.string(),
  runDigest: z.string(),
});

/** The result of `compare --json`. */
export const compareSchema = z.strictObject({
  format: z.literal("rainreckon-compare-1"),
  a: runSide,
  b: runSide,
  /** True where no figure differs. */
  sameFigures: z.boolean(),
  figures: z
    .array(
      z.strictObject({
        /** The file that holds the figure, and "headline" for what the manifest says first. */
        table: z.enum(["headline", "catchments", "gauges", "scores"]),
        /** What the figure belongs to, as words: ids, and instants where the table has them. */
        of: z.string(),
        /** True for what speaks of the whole run or window; false for one step or part of it. */
        whole: z.boolean(),
        /** Column, with its unit. */
        figure: z.string(),
        a: plainValue,
        b: plainValue,
        /** b minus a, in the figure's own unit; null where one of the two is missing or no number. */
        change: z.number().nullable(),
      }),
    )
    .describe("figures that differ, in the order of the tables"),
  plan: z.array(difference).describe("plan values that differ, defaults filled in"),
  inputs: z.array(
    z.strictObject({
      path: z.string(),
      kind: z.string(),
      change: z.enum(["added", "removed", "other content", "other use"]),
      detail: z.string(),
    }),
  ),
});

export type Comparison = z.output<typeof compareSchema>;
type Figure = Comparison["figures"][number];
type InputChange = Comparison["inputs"][number];

/** Which figures differ between two runs, and which plan values and inputs stand behind that. */
export function compareRuns(a: Run, b: Run): Comparison {
  const figures = [
    ...fromDifferences("headline", differences(a.manifest.headline, b.manifest.headline)),
    ...tableFigures("catchments", ["catchment_id", "start", "end"], a.catchments, b.catchments),
    ...tableFigures("gauges", ["network", "gauge_id"], a.gauges, b.gauges),
    ...fromDifferences("scores", differences(a.scores ?? {}, b.scores ?? {})),
  ];
  return {
    format: "rainreckon-compare-1",
    a: side(a),
    b: side(b),
    sameFigures: figures.length === 0,
    figures,
    plan: differences(a.manifest.plan, b.manifest.plan),
    inputs: inputChanges(a.manifest.inputs, b.manifest.inputs),
  };
}

function side(run: Run): Comparison["a"] {
  const { title, status, version, runDigest } = run.manifest;
  return { folder: run.folder, title, status, version, runDigest };
}

/** Scores by gauge, interval or range band are parts; the score of all pairs is the whole. */
const PARTS_OF_SCORES = /\bby[A-Z]\w*\[/;

function fromDifferences(table: Figure["table"], found: readonly Difference[]): Figure[] {
  return found.map(({ path, a, b }) => ({
    table,
    of: "whole run",
    whole: !PARTS_OF_SCORES.test(path),
    figure: path,
    a,
    b,
    change: typeof a === "number" && typeof b === "number" ? b - a : null,
  }));
}

type Rows = readonly Readonly<Record<string, string>>[];

function tableFigures(table: Figure["table"], keys: readonly string[], a: Rows = [], b: Rows = []): Figure[] {
  const figures: Figure[] = [];
  const rowsOfA = byKey(a, keys);
  const rowsOfB = byKey(b, keys);
  const longestMs = Math.max(...[...a, ...b].map(lengthMs));
  for (const key of new Set([...rowsOfA.keys(), ...rowsOfB.keys()])) {
    const rowA = rowsOfA.get(key);
    const rowB = rowsOfB.get(key);
    const whole = lengthMs((rowA ?? rowB)!) === longestMs;
    if (rowA === undefined || rowB === undefined) {
      figures.push({
        table,
        of: key,
        whole,
        figure: "row",
        a: rowA ? "there" : null,
        b: rowB ? "there" : null,
        change: null,
      });
      continue;
    }
    for (const column of new Set([...Object.keys(rowA), ...Object.keys(rowB)])) {
      const [cellA, cellB] = [cellValue(rowA[column]), cellValue(rowB[column])];
      if (keys.includes(column) || cellA === cellB) continue;
      const change = typeof cellA === "number" && typeof cellB === "number" ? cellB - cellA : null;
      figures.push({ table, of: key, whole, figure: column, a: cellA, b: cellB, change });
    }
  }
  return figures;
}

/** Length of the interval that a row is about; 0 for rows without one, which then are all of one length. */
function lengthMs(row: Readonly<Record<string, string>>): number {
  const length = Date.parse(row.end ?? "") - Date.parse(row.start ?? "");
  return Number.isFinite(length) ? length : 0;
}

function byKey(rows: Rows, keys: readonly string[]): Map<string, Readonly<Record<string, string>>> {
  return new Map(rows.map((row) => [keys.map((key) => row[key] ?? "").join(" "), row]));
}

/** A cell as a number where it is one; null where it is empty: missing is not 0. */
function cellValue(cell: string | undefined): string | number | null {
  if (cell === undefined || cell === "") return null;
  const value = Number(cell);
  return Number.isFinite(value) && cell.trim() !== "" ? value : cell;
}

function inputChanges(a: readonly ManifestInput[], b: readonly ManifestInput[]): InputChange[] {
  const inA = new Map(a.map((input) => [input.path, input]));
  const inB = new Map(b.map((input) => [input.path, input]));
  const changes: InputChange[] = [];
  for (const name of [...new Set([...inA.keys(), ...inB.keys()])].sort((x, y) => (x < y ? -1 : 1))) {
    const before = inA.get(name);
    const after = inB.get(name);
    if (before === undefined && after !== undefined) {
      changes.push({ path: name, kind: after.kind, change: "added", detail: useText(after) });
    } else if (before !== undefined && after === undefined) {
      changes.push({ path: name, kind: before.kind, change: "removed", detail: useText(before) });
    } else if (before !== undefined && after !== undefined) {
      if (before.sha256 !== after.sha256) {
        const detail = `${before.sha256.slice(0, 12)} became ${after.sha256.slice(0, 12)}`;
        changes.push({ path: name, kind: after.kind, change: "other content", detail });
      }
      if (useText(before) !== useText(after)) {
        changes.push({
          path: name,
          kind: after.kind,
          change: "other use",
          detail: `${useText(before)} became ${useText(after)}`,
        });
      }
    }
  }
  return changes;
}

function useText(input: ManifestInput): string {
  return input.reason === undefined ? input.use : `${input.use}: ${input.reason}`;
}
