import { existsSync, mkdirSync, readFileSync, renameSync, rmSync, statSync, writeFileSync } from "node:fs";
import path from "node:path";
import { InputError } from "@rainreckon/core";
import type { Command } from "commander";
import { z } from "zod";
import { addCommand, addSchemaFlag, printJson } from "../command.ts";
import { flags } from "../options.ts";
import type { GridLike } from "../plan/compose.ts";
import type { SurveyResult } from "../survey/survey-result.ts";
import { walkFiles } from "../survey/walk.ts";
import { noticeLine } from "../ui/left-out.ts";
import { counted, isoUtc } from "../ui/numbers.ts";
import { type Terminal, terminalOf } from "../ui/terminal.ts";

/** The result of `plan --json`. */
export const planReportSchema = z.strictObject({
  format: z.literal("rainreckon-plan-1"),
  file: z.string(),
  action: z.enum(["written", "updated", "unchanged"]),
  radars: z.array(z.string()),
  grids: z.array(z.string()).describe("gridded sources, by id"),
  gaugeCount: z.number().int(),
  catchmentCount: z.number().int(),
  changes: z.array(z.string()).describe("what --update added"),
  remarks: z.array(z.string()).describe("what --update saw and left alone"),
  wrongCount: z.number().int().describe("faults that survey would name"),
  next: z.string(),
});

interface PlanFlags {
  readonly out: string;
  readonly title: string;
  readonly update?: boolean;
  readonly force?: boolean;
  readonly rate?: boolean;
  readonly gridLike?: string;
}

/** `plan PATH…`: writes a plan from what a survey finds. */
export function registerPlan(program: Command): void {
  const command = addCommand(
    program,
    "plan <path...>",
    "Write a plan (YAML) for a rain total from what lies in files and folders. Every value says whether it was found, guessed or is a default.",
    [
      "rainreckon plan data/ -o plan.yaml",
      "rainreckon plan data/ -o plan.yaml --update",
      "rainreckon plan data/ -o plan.yaml --grid-like model/elevation.tif",
    ],
  )
    .addOption(flags.planFile())
    .addOption(flags.title())
    .addOption(flags.update())
    .addOption(flags.replacePlan())
    .addOption(flags.planRate())
    .addOption(flags.gridLike());
  addSchemaFlag(command, planReportSchema);
  command.action(async (paths: string[]) => {
    const options = command.opts<PlanFlags>();
    const terminal = terminalOf(command);
    refuseToOverwrite(options);
    const gridLike = await gridLikeOf(options);
    const walk = walkFiles(paths);
    terminal.note(`${counted(walk.files.length, "file")} under ${paths.join(", ")}`);
    const { survey } = await import("../survey/survey.ts");
    const surveyed = await survey(paths, walk, terminal);
    const result = options.rate === true ? asOneInstant(surveyed) : surveyed;
    await requireTotal(result, paths);
    const report = await writePlan(options, result, surveyed.findings.window === null, gridLike);
    tellPlan(terminal, report, result);
  });
}

type PlanReport = z.output<typeof planReportSchema>;

/** Step of the series in a fresh plan. */
const STEP_MS = 5 * 60_000;

/** Where scans make no total, the window of what there is: enough for a map of rain rate. */
function asOneInstant(result: SurveyResult): SurveyResult {
  const { radars, window } = result.findings;
  if (window !== null || radars.length === 0) return result;
  const from = radars.map(({ firstStart }) => firstStart).sort()[0]!;
  // A window is whole steps of the plan's series, and holds the last scan.
  const lastMs = Math.max(...radars.map(({ lastEnd }) => Date.parse(lastEnd)));
  const fromMs = Math.floor(Date.parse(from) / STEP_MS) * STEP_MS;
  const toMs = (Math.floor(lastMs / STEP_MS) + 1) * STEP_MS;
  const single = { from: isoUtc(fromMs), to: isoUtc(toMs), basis: "radars" as const };
  return {
    ...result,
    findings: { ...result.findings, window: single },
    radarsInWindow: new Set(radars.map(({ id }) => id)),
  };
}

function refuseToOverwrite({ out, update, force }: PlanFlags): void {
  if (statSync(out, { throwIfNoEntry: false })?.isDirectory() === true) {
    throw new InputError(
      "a plan is a file, and this is a folder",
      out,
      `write -o ${path.join(out, "plan.yaml")}`,
      {
        kind: "usage",
      },
    );
  }
  if (!existsSync(out) || update === true || force === true) return;
  throw new InputError(
    "there is a plan already",
    out,
    "add --update to keep its edits and add what is new, or --force to write over it",
    {
      kind: "usage",
    },
  );
}

/** The grid of the raster that was named. @throws InputError (kind "usage") where it has none, or the plan keeps its own */
async function gridLikeOf({ out, gridLike, update }: PlanFlags): Promise<GridLike | undefined> {
  if (gridLike === undefined) return undefined;
  if (update === true && existsSync(out))
    throw new InputError(
      "an update leaves the grid alone, for every figure stands on it",
      out,
      "write a new plan: leave --update out",
      { kind: "usage" },
    );
  const { readRasterGrid } = await import("@rainreckon/formats");
  const { gridMap } = await import("../total/prepare.ts");
  const grid = await readRasterGrid(gridLike);
  try {
    gridMap(grid);
  } catch (cause) {
    if (!(cause instanceof InputError)) throw cause;
    throw new InputError(cause.what, gridLike, cause.fix, { kind: "usage", cause });
  }
  return { grid, file: gridLike };
}

async function requireTotal({ findings }: SurveyResult, paths: readonly string[]): Promise<void> {
  if (findings.window !== null) return;
  const { RATE_NOT_TOTAL } = await import("../survey/possible.ts");
  const isEmpty = findings.radars.length + findings.grids.length === 0;
  const what = isEmpty ? "there is no scan that can be read" : RATE_NOT_TOTAL;
  const fix = isEmpty
    ? "name folders that hold scans (ODIM_H5, CfRadial, Archive Level II) or gridded rain; survey says what is there"
    : "add scans of at least a second round, or write the plan with --rate for a map of rain rate";
  throw new InputError(what, paths.join(", "), fix, { kind: "no-input" });
}

async function writePlan(
  { out, title, update }: PlanFlags,
  result: SurveyResult,
  rateOnly: boolean,
  gridLike: GridLike | undefined,
): Promise<PlanReport> {
  const { composePlan } = await import("../plan/compose.ts");
  const { parsePlan } = await import("../plan/load.ts");
  const folder = path.dirname(path.resolve(out));
  let action: PlanReport["action"] = "written";
  let changes: readonly string[] = [];
  let remarks: readonly string[] = [];
  if (update === true && existsSync(out)) {
    const { updatePlan } = await import("../plan/update.ts");
    const updated = await updatePlan(readFileSync(out, "utf8"), out, folder, result);
    ({ changes, remarks } = updated);
    action = changes.length === 0 ? "unchanged" : "updated";
    if (action === "updated") replaceFile(out, updated.text);
  } else {
    const text = composePlan(result, folder, title, gridLike);
    parsePlan(text, out);
    replaceFile(out, text);
  }
  const { findings } = result;
  return {
    format: "rainreckon-plan-1",
    file: out,
    action,
    radars: findings.radars.map((radar) => radar.id),
    grids: result.gridSources.map(({ id }) => id),
    gaugeCount: findings.gauges.reduce(
      (sum, { gaugeIds, withoutStation }) => sum + gaugeIds.length - withoutStation.length,
      0,
    ),
    catchmentCount: findings.catchments.reduce((sum, { polygonCount }) => sum + polygonCount, 0),
    changes: [...changes],
    remarks: [...remarks],
    wrongCount: findings.wrong.length,
    next: `rainreckon total ${out} --out ${runFolderFor(out)}${rateOnly ? " --rate" : ""}`,
  };
}

/** Whole or not at all: a plan that somebody edited is never left half written. */
function replaceFile(file: string, text: string): void {
  const fresh = `${file}.${process.pid}.part`;
  try {
    mkdirSync(path.dirname(path.resolve(file)), { recursive: true });
    writeFileSync(fresh, text);
    renameSync(fresh, file);
  } catch (error) {
    rmSync(fresh, { force: true });
    // People know the plan that they asked for, not the draft beside it.
    throw error instanceof Error ? Object.assign(error, { path: file }) : error;
  }
}

function runFolderFor(plan: string): string {
  const name = path.basename(plan, path.extname(plan));
  return name === "plan" ? "run" : `run-${name}`;
}

function tellPlan(terminal: Terminal, report: PlanReport, { findings }: SurveyResult): void {
  for (const notice of findings.wrong.slice(0, 20)) terminal.note(noticeLine(notice));
  if (findings.wrong.length > 20) terminal.note(`and ${findings.wrong.length - 20} more; survey lists them`);
  if (terminal.json) {
    printJson(terminal, planReportSchema, report);
    return;
  }
  const { file, action, radars, grids, gaugeCount, catchmentCount, changes, remarks, next } = report;
  const lines = [
    `${file} ${action}: ${counted(radars.length, "radar")},${grids.length === 0 ? "" : ` ${counted(grids.length, "gridded source")},`} ${counted(gaugeCount, "gauge")}, ${counted(catchmentCount, "catchment")}`,
    ...changes.map((change) => `- ${change}`),
    ...remarks.map((remark) => `- ${remark}`),
    ...(action === "written"
      ? ["Read its first lines: what is marked guessed or default is yours to confirm."]
      : []),
    "",
    terminal.strong("Next"),
    `  ${next}`,
  ];
  terminal.result(lines.join("\n"));
}
