import { statSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { InputError } from "@rainreckon/core";
import { type JsonValue, sha256OfFile, writeJson, writeText } from "@rainreckon/formats";
import { renderReport } from "@rainreckon/report";
import { CHECKS_FILE, checkDocument } from "../check/document.ts";
import type { Manifest } from "../manifest.ts";
import { loadPlan } from "../plan/load.ts";
import { leftOutLog } from "../ui/left-out.ts";
import { counted, countText } from "../ui/numbers.ts";
import { progressBar } from "../ui/progress.ts";
import type { Terminal } from "../ui/terminal.ts";
import { version } from "../version.ts";
import { sumAdjusted } from "./adjust.ts";
import { compareWithGauges } from "./against-gauges.ts";
import { type AssembledRun, assemble } from "./assemble.ts";
import { runCautions, STANDING_CAUTIONS } from "./cautions.ts";
import { echoAccount, wordsByRadar } from "./echo-account.ts";
import { estimate, type RunEstimate } from "./estimate.ts";
import { type ArealFigure, bestMm, districtFigure, headlineUnderRelations, windowFigure } from "./figures.ts";
import { inputsAfterWork } from "./inputs-after-work.ts";
import { LEARNED, learnOnce, learnsBeforehand, writeLearnedOf } from "./learned-run.ts";
import { megabytes, memberBytes, refuseMembersBeyondDisk, writeMembers } from "./members.ts";
import {
  type OutputSources,
  writeAssets,
  writeCatchments,
  writeGauges,
  writeMaps,
  writePairs,
  writeReadme,
  writeScores,
  writeTotals,
} from "./outputs.ts";
import { type OverrideEffect, overrideCautions, overrideEffects } from "./override-effects.ts";
import { type PreparedRun, prepareRun } from "./prepare.ts";
import { reportInput } from "./report-input.ts";
import { MANIFEST, MEMBERS_LEFT_OUT, noticeCountOf, openRunFolder, RUN_LOG } from "./run-folder.ts";
import { areaRanges, learnUncertainty } from "./uncertainty.ts";
import { workUnits } from "./work.ts";

export interface TotalOptions {
  readonly out: string;
  readonly workers: number;
  readonly force: boolean;
  readonly dryRun: boolean;
  /** How many equally likely fields are written; 0 for none. */
  readonly members: number;
  /** Whether they are written though the disk may not hold them. */
  readonly despiteSpace: boolean;
}

/** What a run came to, for the terminal and for --json. */
export type TotalOutcome =
  | { readonly kind: "dry run"; readonly run: PreparedRun; readonly estimate: RunEstimate }
  | { readonly kind: "already there"; readonly run: PreparedRun }
  | {
      readonly kind: "done";
      readonly run: PreparedRun;
      readonly manifest: Manifest;
      readonly resumedUnits: number;
    };

/** The outcome, and how many inputs or parts of them were left out or doubted. */
export interface TotalResult {
  readonly outcome: TotalOutcome;
  readonly noticeCount: number;
}

/** Scans, gauges and catchments of a plan in; a folder of totals, figures, report and manifest out. */
export async function runTotal(
  planPath: string,
  options: TotalOptions,
  terminal: Terminal,
): Promise<TotalResult> {
  const started = performance.now();
  const startedAt = new Date().toISOString();
  const loaded = await loadPlan(planPath);
  const log = leftOutLog(terminal);
  for (const notice of loaded.notices) log.add("file not found", notice);
  const planned = await prepareRun(loaded, log, (count, noun) => progressBar(terminal, count, noun));
  if (options.dryRun) {
    log.finish();
    return {
      outcome: { kind: "dry run", run: planned, estimate: estimate(planned, options.members) },
      noticeCount: log.count,
    };
  }
  if (options.members > 0) {
    if (!options.despiteSpace) refuseMembersBeyondDisk(planned, options.members, options.out);
    const most = countText(megabytes(memberBytes(planned, options.members)));
    terminal.note(`${counted(options.members, "member")} will take up to ${most} MB`);
  }
  const folder = openRunFolder(
    path.resolve(options.out),
    { runDigest: planned.runDigest, members: options.members },
    options.force,
  );
  if (folder.movedTo !== undefined) {
    terminal.note(`what was in that folder was moved to ${path.relative(process.cwd(), folder.movedTo)}`);
  }
  if (folder.state === "finished") {
    log.finish();
    return { outcome: { kind: "already there", run: planned }, noticeCount: noticeCountOf(folder.folder) };
  }
  const indexedMs = performance.now() - started;

  const taught = await learnOnce(planned, log, folder.learnedFile);
  if (learnsBeforehand(taught)) await writeLearnedOf(taught, folder.draft(LEARNED));
  const learnedMs = performance.now() - started;
  const progress = progressBar(terminal, taught.jobs.length, "units of work");
  const { store, resumed } = await workUnits(taught, folder.unitsFolder, options.workers, progress);
  progress.end();
  const workedMs = performance.now() - started;
  const total = assemble(
    taught.shape,
    taught.jobs,
    store,
    planned.window.endEpochMs - planned.window.startEpochMs,
  );
  for (const { what, where, fix } of total.notices) log.add("sweep left out", { what, where, fix });
  refuseUndecodable(taught, total);
  const run = { ...taught, inputs: inputsAfterWork(taught.inputs, taught.shape, total.notices) };
  const comparison = compareWithGauges(run, total);
  const adjustedTotalMm = comparison.adjustment.applied
    ? sumAdjusted(run, total, comparison.adjustment, store)
    : undefined;
  const district = districtFigure({ run, total, comparison, adjustedTotalMm });
  const overrides = overrideEffects(run, total, store, bestMm(district));
  const cautions = [...runCautions(run, total, comparison, district), ...overrideCautions(overrides)];
  const uncertainty = learnUncertainty(run, total, comparison, adjustedTotalMm);
  const sources: OutputSources = {
    run,
    total,
    comparison,
    store,
    adjustedTotalMm,
    uncertainty,
    cautions: cautions.map((caution) => caution.text),
    draft: folder.draft,
  };
  await writeTotals(sources);
  const maps = await writeMaps(sources);
  await writeCatchments(sources);
  if (run.assets.length > 0) await writeAssets(sources);
  await writePairs(sources);
  await writeGauges(sources);
  await writeScores(sources);
  await writeJson(folder.draft(CHECKS_FILE), checkDocument(run, comparison) as JsonValue);
  const report = renderReport(
    reportInput({ run, total, comparison, cautions, adjustedTotalMm, notices: log.all, store, uncertainty }),
  );
  await writeText(folder.draft("report.html"), report);
  const files = [
    "totals.nc",
    ...maps,
    "catchments.csv",
    ...(run.assets.length > 0 ? ["assets.csv"] : []),
    "pairs.csv",
    "gauges.csv",
    "scores.json",
    CHECKS_FILE,
    "report.html",
    ...(learnsBeforehand(run) ? [LEARNED] : []),
  ];
  if (options.members > 0) {
    if (uncertainty.known) {
      const bar = progressBar(terminal, options.members, "members");
      files.push(...(await writeMembers(sources, uncertainty, options.members, bar)));
      bar.end();
    } else {
      log.add(MEMBERS_LEFT_OUT, {
        what: uncertainty.reason,
        where: "--members",
        fix: "members need gauges that tell of errors",
      });
    }
  }
  await writeReadme(sources, [...files, "README.txt", MANIFEST, RUN_LOG]);
  files.push("README.txt");

  const manifest = await manifestOf(sources, files, log.all, district, overrides);
  await writeJson(folder.draft(MANIFEST), manifest as JsonValue);
  await writeJson(folder.draft(RUN_LOG), {
    startedAt,
    finishedAt: new Date().toISOString(),
    host: os.hostname(),
    node: process.versions.node,
    workers: options.workers,
    resumedUnits: resumed,
    units: run.jobs.length,
    // From the folder on, so that a run and its inputs may be moved together.
    plan: path.relative(path.resolve(options.out), loaded.path).split(path.sep).join("/"),
    indexSeconds: seconds(indexedMs),
    learnSeconds: seconds(learnedMs - indexedMs),
    workSeconds: seconds(workedMs - learnedMs),
    handOverSeconds: seconds(performance.now() - started - workedMs),
  });
  folder.publish([...files, RUN_LOG]);
  log.finish();
  return { outcome: { kind: "done", run, manifest, resumedUnits: resumed }, noticeCount: log.count };
}

/** Headers that can be read and arrays that cannot: no rain was found, and no dry hour either. */
function refuseUndecodable({ radars }: PreparedRun, { sum, notices }: AssembledRun): void {
  if (notices.length === 0 || sum.observedMs.some((ms) => ms > 0)) return;
  throw new InputError(
    `no scan is left: ${counted(notices.length, "sweep")} could not be decoded, and the rest observe nothing`,
    `radars ${radars.map(({ radar }) => radar.id).join(", ")}`,
    "see the lines above, and fetch the files again",
    { kind: "no-input" },
  );
}

function seconds(ms: number): number {
  return Math.round(ms) / 1000;
}

async function manifestOf(
  { run, total, comparison, adjustedTotalMm, uncertainty, draft, cautions }: OutputSources,
  files: readonly string[],
  notices: readonly Manifest["notices"][number][],
  district: ArealFigure,
  overrides: readonly OverrideEffect[],
): Promise<Manifest> {
  const outputs = await Promise.all(
    files.toSorted().map(async (file) => ({
      file,
      sha256: await sha256OfFile(draft(file)),
      bytes: statSync(draft(file)).size,
    })),
  );
  const { plan, digest } = run.loaded;
  const known = (value: number): number | null => (Number.isFinite(value) ? value : null);
  const { adjustment } = comparison;
  const sources = { run, total, comparison, adjustedTotalMm };
  const boundsOf = (area: PreparedRun["district"]) => {
    const range = uncertainty.known ? areaRanges(run, uncertainty, area).window : undefined;
    return { p10Mm: known(range?.p10Mm ?? Number.NaN), p90Mm: known(range?.p90Mm ?? Number.NaN) };
  };
  return {
    format: "rainreckon-manifest-1",
    version: version(),
    status: plan.status,
    title: plan.title,
    runDigest: run.runDigest,
    plan: JSON.parse(JSON.stringify(plan)) as Record<string, unknown>,
    planDigest: digest,
    inputs: [...run.inputs],
    outputs,
    counts: {
      radars: run.radars.length,
      rounds: run.radars.reduce((sum, { rounds }) => sum + rounds.length, 0),
      sweepsDecoded: total.counts.sweepsDecoded,
      gatesRead: total.counts.gatesRead,
      gatesCapped: total.counts.gatesCapped,
      cellsFilledByHigherSweep: total.counts.cellsFilledByHigherSweep,
      grids: run.shape.grids.length,
      gridLayersDecoded: total.counts.gridLayersDecoded,
      gridCellsRead: total.counts.gridCellsRead,
      gridCellsCapped: total.counts.gridCellsCapped,
      gauges: comparison.gauges.length,
      gaugesUsed: comparison.gauges.filter(({ whole }) => whole.used).length,
      gaugesWithCare: comparison.gauges.filter(({ verdict }) => verdict.verdict === "use with care").length,
      gaugesDoubted: comparison.gauges.filter(({ verdict }) => verdict.verdict === "leave out").length,
      pairs: comparison.pairs.length,
      pairsUsed: comparison.before.usedCount,
      catchments: run.catchments.length,
      assets: run.assets.length,
      units: run.jobs.length,
    },
    notices: [...notices],
    headline: {
      window: { start: plan.window.from, end: plan.window.to },
      districtMm: known(bestMm(district)),
      districtRadarMm: known(district.radarMm),
      districtAdjustedMm: known(district.adjustedMm),
      ...boundsOf(run.district),
      observedFraction: district.observedFraction,
      cappedFraction: district.cappedFraction,
      factorGaugeOverRadar: known(adjustment.applied ? adjustment.factor : Number.NaN),
      adjustmentMethod: adjustment.applied ? adjustment.title : null,
      adjustmentReason: adjustment.applied ? null : adjustment.reason,
      crossValidatedErrorMm: known(adjustment.applied ? adjustment.crossValidation.errorMm : Number.NaN),
      crossValidatedErrorPercent: known(
        adjustment.applied ? adjustment.crossValidation.errorPercent : Number.NaN,
      ),
      underRelations: headlineUnderRelations(sources).map(({ name, mm, observedFraction }) => ({
        name,
        mm: known(mm),
        observedFraction,
      })),
      catchments: run.catchments.map((catchment) => {
        const figure = windowFigure(catchment.cells, sources);
        return {
          id: catchment.id,
          name: catchment.name,
          mm: known(bestMm(figure)),
          ...boundsOf(catchment.cells),
          observedFraction: figure.observedFraction,
        };
      }),
      overrides: overrides.map((effect) => ({
        ...effect,
        districtMm: known(effect.districtMm),
        withoutMm: known(effect.withoutMm),
      })),
      cautions: [...cautions, ...STANDING_CAUTIONS],
    },
    echo: manifestEcho(sources),
  };
}

function manifestEcho(sources: Pick<OutputSources, "run" | "total" | "comparison">): Manifest["echo"] {
  const account = echoAccount(sources.run, sources.total, sources.comparison);
  if (account === undefined) return null;
  const { screens, corrections, gates, profile, calibration } = account;
  const known = (db: number) => (Number.isFinite(db) ? db : null);
  return {
    screens: [...screens],
    corrections: [...corrections],
    gates: { ...gates },
    profile: [...profile],
    learned: Object.fromEntries(wordsByRadar(account)),
    calibration: calibration.map(({ siteId, errorDb, lowDb, highDb, offsetDb, reason }) => ({
      radar: siteId,
      errorDb: known(errorDb),
      lowDb: known(lowDb),
      highDb: known(highDb),
      proposedOffsetDb: offsetDb ?? null,
      reason,
    })),
  };
}
