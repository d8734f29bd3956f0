import { createHash } from "node:crypto";
import { mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, statSync, writeFileSync } from "node:fs";
import { createRequire } from "node:module";
import { tmpdir } from "node:os";
import path from "node:path";
import h5wasm, { type Dataset } from "h5wasm/node";
import { afterAll } from "vitest";
import { type Document, parseDocument } from "yaml";
import { type CliResult, cli } from "./run-cli.ts";

/** Foreign tools must be there where this is set; elsewhere checks that need them are skipped. */
export const FOREIGN = process.env.RAINRECKON_FOREIGN_TOOLS === "1";

/** A folder that is gone once the tests of the file are done. */
export function scratchFolder(name: string): string {
  const folder = mkdtempSync(path.join(tmpdir(), `rainreckon-${name}-`));
  afterAll(() => rmSync(folder, { recursive: true, force: true }));
  return folder;
}

/** Writes a plan for what lies in a folder, with the command, then changes what a person would. */
export function planFor(folder: string, change?: (plan: Document) => void, file = "plan.yaml"): string {
  const { status, stderr } = cli(["plan", ".", "-o", file, "--force", "--quiet"], folder);
  if (status !== 0) throw new Error(`plan ended with ${status}: ${stderr}`);
  const plan = path.join(folder, file);
  if (change !== undefined) editPlan(plan, plan, change);
  return plan;
}

export function editPlan(from: string, to: string, change: (plan: Document) => void): string {
  const document = parseDocument(readFileSync(from, "utf8"));
  change(document);
  writeFileSync(to, document.toString());
  return to;
}

/** Section `echo` of a plan under which stored numbers go straight to rain, for figures that are worked out by hand. */
export const NO_ECHO_WORK = {
  screening: { use: false },
  blockage: { use: false },
  gas: { use: "never" },
  attenuation: { method: "none" },
  profile: { use: false },
  rate: { rainType: false, polarimetric: false, hail: false },
} as const;

/** Runs `total` from the folder that the plan lies in, whose names then stand in messages as people see them. */
export function total(plan: string, out: string, flags: readonly string[] = [], env = {}): CliResult {
  return cli(["total", path.basename(plan), "--out", out, ...flags], path.dirname(plan), env);
}

export type CsvRow = Readonly<Record<string, string>>;

/** The part of the CSV library that is used here; its types belong to another package. */
interface CsvLibrary {
  parse(
    text: string,
    options: { header: true; skipEmptyLines: true },
  ): { readonly data: CsvRow[]; readonly errors: readonly { readonly message: string }[] };
}
const csvLibrary = createRequire(import.meta.url)("papaparse") as CsvLibrary;

export function csvRows(file: string): CsvRow[] {
  const { data, errors } = csvLibrary.parse(readFileSync(file, "utf8"), {
    header: true,
    skipEmptyLines: true,
  });
  if (errors.length > 0) throw new Error(`${file}: ${errors[0]?.message}`);
  return data;
}

/** An array of a NetCDF-4 file, read with the general HDF5 library. */
export interface ReadArray {
  readonly shape: readonly number[];
  readonly values: Float32Array | Float64Array;
}

export async function readNetCdf(file: string): Promise<ReadonlyMap<string, ReadArray>> {
  await h5wasm.ready;
  const opened = new h5wasm.File(file, "r");
  try {
    const arrays = new Map<string, ReadArray>();
    for (const name of opened.keys()) {
      const { value, shape } = opened.get(name) as Dataset;
      if (value instanceof Float32Array || value instanceof Float64Array)
        arrays.set(name, { shape: shape ?? [], values: value });
    }
    return arrays;
  } finally {
    opened.close();
  }
}

/** @throws Error where the file has no such array */
export function arrayOf(arrays: ReadonlyMap<string, ReadArray>, name: string): ReadArray {
  const found = arrays.get(name);
  if (found === undefined) throw new Error(`totals.nc has no ${name}`);
  return found;
}

/** SHA-256 of every file of a run but the one that may differ. */
export function fingerprints(run: string): Record<string, string> {
  const files = readdirSync(run).filter((file) => file !== "run-log.json");
  return Object.fromEntries(
    files.sort().map((file) => {
      const bytes = readFileSync(path.join(run, file));
      return [file, createHash("sha256").update(bytes).digest("hex")];
    }),
  );
}

/** Time of change and size of every file of a folder, to show that nothing was touched. */
export function touchedAt(folder: string): string[] {
  return readdirSync(folder, { recursive: true, encoding: "utf8" })
    .sort()
    .map((name) => {
      const { mtimeMs, ctimeMs, size } = statSync(path.join(folder, name));
      return `${name} ${mtimeMs} ${ctimeMs} ${size}`;
    });
}

export interface RunManifest {
  readonly runDigest: string;
  readonly inputs: readonly { path: string; use: string; reason?: string }[];
  readonly outputs: readonly { file: string; sha256: string }[];
  readonly notices: readonly { kind: string; what: string; where: string; fix: string; count: number }[];
  readonly counts: Readonly<Record<string, number>>;
  readonly headline: Readonly<Record<string, unknown>>;
}

export function manifestOf(run: string): RunManifest {
  return JSON.parse(readFileSync(path.join(run, "manifest.json"), "utf8")) as RunManifest;
}

export function writeIn(folder: string, name: string, text: string): string {
  const file = path.join(folder, name);
  mkdirSync(path.dirname(file), { recursive: true });
  writeFileSync(file, text);
  return file;
}
