import { readFileSync, statSync } from "node:fs";
import path from "node:path";
import { InputError, type Notice } from "@rainreckon/core";
import type { ShapefileParts } from "@rainreckon/formats";
import { type Document, LineCounter, parseDocument } from "yaml";
import { canonicalJson, sha256Hex } from "../digest.ts";
import { nearest } from "../text/nearest.ts";
import { crossChecks } from "./cross-checks.ts";
import { faultsOfIssues, planError } from "./faults.ts";
import { namesBeside, resolveFiles } from "./resolve.ts";
import { type Plan, type PlanGaugeFiles, type PlanGrids, planSchema } from "./schema.ts";
import { shapefileParts } from "./shapefile-parts.ts";
import { lineOfPath, type PlanPath, pathText } from "./yaml-place.ts";

/** A plan is written by people; what is longer than this is not a plan. */
const MAX_PLAN_BYTES = 1_000_000;
/** Aliases repeat small things; a document that unfolds further than this is hostile. */
const MAX_ALIASES = 100;

/** The files of one entry of `gauges`, as absolute paths. */
export interface LoadedGaugeFiles {
  readonly spec: PlanGaugeFiles;
  readonly files: readonly string[];
  /** The table of stations; of WaterML files that give the positions themselves, these. */
  readonly stationsFiles: readonly string[];
}

/** The files of one entry of `grids`, as absolute paths in code-unit order. */
export interface LoadedGrids {
  readonly spec: PlanGrids;
  readonly files: readonly string[];
}

/** A plan that was read and checked. All paths are absolute. */
export interface LoadedPlan {
  readonly path: string;
  /** What the plan's relative paths start from. */
  readonly folder: string;
  readonly plan: Plan;
  /** The plan's file, word for word. */
  readonly text: string;
  /** SHA-256 of the plan with every default filled in; comments and the order of keys do not change it. */
  readonly digest: string;
  /** Files that the globs of `scans` match now, in code-unit order, each once. */
  readonly scanFiles: readonly string[];
  /** In the order of the plan. */
  readonly gridFiles: readonly LoadedGrids[];
  /** In the order of the plan. */
  readonly gaugeFiles: readonly LoadedGaugeFiles[];
  readonly catchmentsFile?: string;
  /** The files that belong to it where it is a Shapefile. */
  readonly catchmentsParts: ShapefileParts;
  /** The terrain model that tells what stands in the beams. */
  readonly terrainFile?: string;
  /** Paths and globs that match nothing. */
  readonly notices: readonly Notice[];
}

/**
 * Reads a plan, checks it whole, and finds the files it names.
 *
 * @param planPath - relative to the working folder, or absolute
 * @throws InputError (kind "usage") naming line, path and the nearest valid key; where a plan has several
 * faults, the error's `cause` is an AggregateError holding the others
 */
export async function loadPlan(planPath: string): Promise<LoadedPlan> {
  const absolute = path.resolve(planPath);
  const text = readPlanText(absolute, planPath);
  const plan = parsePlan(text, planPath);
  const folder = path.dirname(absolute);
  const notices: Notice[] = [];
  const onNotice = (notice: Notice) => notices.push(notice);
  const scanFiles = await resolveFiles(plan.scans, folder, onNotice);
  const gridFiles: LoadedGrids[] = [];
  for (const spec of plan.grids)
    gridFiles.push({ spec, files: await resolveFiles(spec.files, folder, onNotice) });
  const gaugeFiles: LoadedGaugeFiles[] = [];
  for (const spec of plan.gauges) {
    const files = await resolveFiles(spec.files, folder, onNotice);
    const stationsFiles = spec.stations === undefined ? files : [path.resolve(folder, spec.stations.file)];
    gaugeFiles.push({ spec, files, stationsFiles });
  }
  const catchmentsFile =
    plan.catchments === undefined ? undefined : path.resolve(folder, plan.catchments.file);
  return {
    path: absolute,
    folder,
    plan,
    text,
    digest: sha256Hex(canonicalJson(plan)),
    scanFiles,
    gridFiles,
    gaugeFiles,
    ...(catchmentsFile === undefined ? {} : { catchmentsFile }),
    ...(plan.echo.blockage.terrain === undefined
      ? {}
      : { terrainFile: path.resolve(folder, plan.echo.blockage.terrain) }),
    catchmentsParts: catchmentsFile === undefined ? {} : shapefileParts(catchmentsFile),
    notices,
  };
}

function readPlanText(absolute: string, asGiven: string): string {
  const stat = statSync(absolute, { throwIfNoEntry: false });
  if (stat === undefined) {
    const meant = nearest(path.basename(absolute), namesBeside(absolute));
    const fix =
      meant === undefined ? "write one with: rainreckon plan PATH… -o plan.yaml" : `did you mean "${meant}"?`;
    throw new InputError("there is no such plan", asGiven, fix, { kind: "usage" });
  }
  if (!stat.isFile()) {
    throw new InputError("a plan is a file, and this is none", asGiven, "name the plan's .yaml file", {
      kind: "usage",
    });
  }
  if (stat.size > MAX_PLAN_BYTES) {
    throw new InputError(
      `a plan of ${stat.size} bytes is too long`,
      asGiven,
      `a plan has at most ${MAX_PLAN_BYTES} bytes: name the right file`,
      { kind: "usage" },
    );
  }
  return readFileSync(absolute, "utf8");
}

/** A plan as YAML: its document with comments and places, and the counter that turns places into lines. */
export interface PlanDocument {
  readonly document: Document;
  readonly counter: LineCounter;
}

/** @throws InputError (kind "usage") with line and column where the text is no YAML 1.2 */
export function parsePlanDocument(text: string, name: string): PlanDocument {
  const counter = new LineCounter();
  const document = parseDocument(text, {
    version: "1.2",
    schema: "core",
    lineCounter: counter,
    prettyErrors: false,
    uniqueKeys: true,
  });
  const fault = document.errors[0] ?? document.warnings[0];
  if (fault !== undefined) {
    const { line, col } = counter.linePos(fault.pos[0]);
    const what = `this is no YAML that can be read: ${fault.message.split("\n")[0]}`;
    throw new InputError(
      what,
      `${name}, line ${line}, column ${col}`,
      "mend the line (look at indents, colons and quotes)",
      {
        kind: "usage",
      },
    );
  }
  return { document, counter };
}

/**
 * A plan from its text: syntax, keys, types, ranges, and values against each other.
 *
 * @param name - what the errors call the file
 * @throws InputError (kind "usage")
 */
export function parsePlan(text: string, name: string): Plan {
  const { document, counter } = parsePlanDocument(text, name);
  let raw: unknown;
  try {
    raw = document.toJS({ maxAliasCount: MAX_ALIASES });
  } catch (cause) {
    throw new InputError(
      "the plan repeats itself beyond all measure through aliases",
      name,
      "write the values out",
      {
        kind: "usage",
        cause,
      },
    );
  }
  const line = (at: PlanPath) => lineOfPath(document, counter, at);
  const where = (at: PlanPath) => `${name}, line ${line(at)}, ${pathText(at)}`;
  const parsed = planSchema.safeParse(raw ?? {});
  if (!parsed.success) throw planError(faultsOfIssues(parsed.error.issues), where, line);
  const faults = crossChecks(parsed.data);
  if (faults.length > 0) throw planError(faults, where, line);
  return parsed.data;
}
