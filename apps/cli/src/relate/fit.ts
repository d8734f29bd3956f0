import { type CapSetting, InputError, RELATIONS, resolveCap, type ScoreInterval } from "@rainreckon/core";
import { displayText, readZrPairs } from "@rainreckon/formats";
import {
  type BootstrapSettings,
  biasFreeFit,
  choosePairs,
  type FitSettings,
  type FittedRelations,
  fitRelations,
  type PowerLaw,
  pickPairs,
  type RelationError,
  type RelationFitName,
  relationError,
  type ZrPairs,
} from "@rainreckon/verification";
import type { LeftOutLog } from "../ui/left-out.ts";
import { isoUtc } from "../ui/numbers.ts";
import type { Terminal } from "../ui/terminal.ts";
import type { RelationFitResult } from "./fit-schema.ts";
import { FIT_TITLES, fitWarnings } from "./fit-words.ts";
import { type FitPairs, fitPairsOf, settledPairs } from "./measured-pairs.ts";
import { measuredRun } from "./measured-run.ts";
import { offeredOf } from "./offered-fit.ts";
import { ofRain, planConversion } from "./plan-conversion.ts";
import { type NamedRelation, relationsByName } from "./relation-table.ts";

export interface FitOptions {
  /** A run's folder or a plan; undefined where a table of pairs is given. */
  readonly target: string | undefined;
  readonly pairsFile: string | undefined;
  readonly plan: string | undefined;
  readonly intervalMinutes: number | undefined;
  readonly leastRateMmPerHour: number;
  /** Name or A,b; undefined is the plan's, or the default. */
  readonly reference: string | undefined;
  /** The fit to offer, whatever speaks for another. */
  readonly method: RelationFitName | undefined;
}

/** A result with the pairs that it rests on, for the chart. */
export interface FittedPairs {
  readonly result: RelationFitResult;
  readonly pairs: ZrPairs;
}

/** The relation of plans in which nobody chose one, and of tables. */
const DEFAULT_RELATION = "marshall-1955-200/1.6";
const DEFAULT_CAP: CapSetting = { dbz: 53 };
/** As a fresh plan has them. */
const BOOTSTRAP: BootstrapSettings = { seed: 1, samples: 1000, level: 0.9 };

/** Pairs as they are fitted, and what is to be said of where they come from. */
interface Prepared {
  readonly source: RelationFitResult["source"];
  readonly fitPairs: FitPairs;
  readonly fitted: FittedRelations;
  readonly reference: NamedRelation;
  readonly cap: CapSetting;
}

/**
 * Relations fitted to the pairs of a run, a plan or a table.
 *
 * @throws InputError as `measuredRun` and `readZrPairs`; of kind "usage" where neither or both are given
 */
export async function fitOf(options: FitOptions, log: LeftOutLog, terminal: Terminal): Promise<FittedPairs> {
  const { target, pairsFile } = options;
  if ((target === undefined) === (pairsFile === undefined)) {
    throw new InputError(
      target === undefined
        ? "there is nothing to fit to"
        : "a run and a table of pairs are two things to fit to",
      "command line, rainreckon relate fit",
      "name the folder of a run or a plan, or a table with --pairs",
      { kind: "usage" },
    );
  }
  const prepared =
    target !== undefined
      ? await ofRun(target, options, log, terminal)
      : await ofTable(pairsFile as string, options, log);
  return { result: resultOf(prepared, options), pairs: prepared.fitPairs.pairs };
}

function settingsOf(reference: PowerLaw, options: FitOptions, bootstrap: BootstrapSettings): FitSettings {
  return { leastRateMmPerHour: options.leastRateMmPerHour, reference, bootstrap };
}

async function ofRun(
  target: string,
  options: FitOptions,
  log: LeftOutLog,
  terminal: Terminal,
): Promise<Prepared> {
  const measured = await measuredRun(target, options.plan, log, terminal);
  const { plan } = measured.run.loaded;
  const own = planConversion(plan);
  const reference = options.reference === undefined ? own.relation : referenceOf(options.reference);
  const { cap } = own;
  const capDbz = resolveCap(cap, reference).dbz;
  const intervalMs = options.intervalMinutes === undefined ? undefined : options.intervalMinutes * 60_000;
  const pairsAt = (exponent: number) => fitPairsOf(measured, exponent, intervalMs, capDbz);
  const biasFree = ({ pairs }: FitPairs) => quickFit(pairs, reference, options.leastRateMmPerHour);
  let { pairs: fitPairs, exponent } = settledPairs(pairsAt, biasFree, reference.b);
  const settings = settingsOf(reference, options, plan.bootstrap);
  let fitted = fitRelations(fitPairs.pairs, fitPairs.units, settings);
  if (fitted.offered !== "bias-free" && exponent !== reference.b) {
    // The exponent that is not believed must not have averaged either.
    exponent = reference.b;
    fitPairs = pairsAt(exponent);
    fitted = fitRelations(fitPairs.pairs, fitPairs.units, settings);
  }
  return {
    fitPairs,
    fitted,
    reference,
    cap,
    source: {
      kind: measured.kind,
      name: displayText(target, 200),
      gaugeCount: fitPairs.gaugeCount,
      start: plan.window.from,
      end: plan.window.to,
      intervalMinutes: fitPairs.intervalMinutes ?? null,
      averagingExponent: exponent,
      bFromMeanZ: finite(biasFree(pairsAt(1)).b),
      leftOut: [...fitPairs.leftOut],
      remarks: [...measured.remarks],
    },
  };
}

function quickFit(pairs: ZrPairs, reference: PowerLaw, leastRateMmPerHour: number): PowerLaw {
  const leastDbz = 10 * Math.log10(reference.a * leastRateMmPerHour ** reference.b);
  const { either } = choosePairs(pairs, leastRateMmPerHour, leastDbz);
  return biasFreeFit(pickPairs(pairs, either), new Float64Array(either.length).fill(1));
}

async function ofTable(file: string, options: FitOptions, log: LeftOutLog): Promise<Prepared> {
  const table = await readZrPairs(file, (notice) => log.add("pair left out", notice));
  const reference = referenceOf(options.reference);
  const count = table.dbz.length;
  const gauges = [...new Set(table.gauges ?? [])];
  const gaugeIndex = new Map(gauges.map((gauge, k) => [gauge, k]));
  const ends = [...new Set(table.endEpochMs ?? [])].sort((a, b) => a - b);
  const endIndex = new Map(ends.map((end, k) => [end, k]));
  // Without a time the order of the rows is all there is to tell which pairs belong together.
  const timeCount = table.endEpochMs === undefined ? count : ends.length;
  const fitPairs: FitPairs = {
    pairs: table,
    units: {
      gaugeOf: Uint32Array.from({ length: count }, (_, i) => gaugeIndex.get(table.gauges?.[i] ?? "") ?? 0),
      gaugeCount: Math.max(1, gauges.length),
      timeOf: Uint32Array.from({ length: count }, (_, i) =>
        table.endEpochMs === undefined ? i : (endIndex.get(table.endEpochMs[i] as number) as number),
      ),
      timeCount,
      // A common start for the length of a block.
      blockLength: Math.max(1, Math.round(timeCount ** (1 / 3))),
    },
    gaugeCount: gauges.length,
    intervalMinutes: undefined,
    leftOut: table.rowsLeftOut === 0 ? [] : [{ reason: "the row cannot be read", count: table.rowsLeftOut }],
    cappedShare: Number.NaN,
  };
  const capDbz = resolveCap(DEFAULT_CAP, reference).dbz;
  const above = table.dbz.reduce((sum, dbz) => sum + (dbz >= capDbz ? 1 : 0), 0);
  return {
    fitPairs: { ...fitPairs, cappedShare: above / count },
    fitted: fitRelations(table, fitPairs.units, settingsOf(reference, options, BOOTSTRAP)),
    reference,
    cap: DEFAULT_CAP,
    source: {
      kind: "pairs",
      name: displayText(file, 200),
      gaugeCount: table.gauges === undefined ? null : gauges.length,
      start: null,
      end: ends.length === 0 ? null : isoUtc(ends[ends.length - 1] as number),
      intervalMinutes: null,
      averagingExponent: null,
      bFromMeanZ: null,
      leftOut: [...fitPairs.leftOut],
      remarks: [],
    },
  };
}

function referenceOf(name: string | undefined): NamedRelation {
  const [reference] = relationsByName([name ?? DEFAULT_RELATION]);
  return ofRain(reference as NamedRelation);
}

function resultOf(
  { source, fitPairs, fitted, reference, cap }: Prepared,
  options: FitOptions,
): RelationFitResult {
  const { pairs } = fitPairs;
  const { cover } = fitted;
  const { either } = choosePairs(pairs, options.leastRateMmPerHour, cover.leastDbz);
  const wet = pickPairs(pairs, either);
  const spread = (values: readonly number[]) => ({
    least: finite(values[0]),
    p10: finite(values[1]),
    median: finite(values[2]),
    p90: finite(values[3]),
    greatest: finite(values[4]),
  });
  return {
    format: "rainreckon-relation-fit-1",
    source,
    pairs: {
      count: cover.pairCount,
      wetOnBothSides: cover.bothCount,
      wetOnEitherSide: cover.eitherCount,
      leastRateMmPerHour: options.leastRateMmPerHour,
      leastDbz: cover.leastDbz,
      rateMmPerHour: spread(cover.rateMmPerHour),
      dbz: spread(cover.dbz),
      correlation: finite(fitted.correlation),
      pivotRateMmPerHour: finite(fitted.pivotRateMmPerHour),
      conditionIndex: finite(fitted.conditionIndex),
      drawn: fitted.drawn,
    },
    reference: {
      name: reference.name,
      a: reference.a,
      b: reference.b,
      error: errorOf(relationError(wet, reference)),
    },
    fits: fitted.fits.map((fit) => ({
      name: fit.name,
      title: FIT_TITLES[fit.name],
      a: finite(fit.a),
      b: finite(fit.b),
      aInterval: intervalOf(fit.aInterval),
      bInterval: intervalOf(fit.bInterval),
      logACorrelation: finite(fit.logACorrelation),
      pivotDbz: finite(fit.pivotDbz),
      pivotInterval: intervalOf(fit.pivotInterval),
      error: errorOf(fit.error),
      warnings: fitWarnings(fit, cap, cover),
      ...(fit.reason === "" ? {} : { reason: fit.reason }),
    })),
    probabilityMatching: fitted.matched.map(({ probability, dbz, rateMmPerHour }) => ({
      probability,
      dbz,
      rateMmPerHour,
    })),
    published: RELATIONS.filter(({ phase }) => phase === "rain").map((relation) => ({
      name: relation.name,
      a: relation.a,
      b: relation.b,
      error: errorOf(relationError(wet, relation)),
    })),
    cap: { dbz: resolveCap(cap, reference).dbz, shareAbove: finite(fitPairs.cappedShare) },
    doubts: fitted.doubts.map(({ kind, words }) => ({ kind, words })),
    offered: offeredOf(fitted, source, options.method),
  };
}

function finite(value: number | undefined): number | null {
  return value !== undefined && Number.isFinite(value) ? value : null;
}

function intervalOf({ low, high, level, reason }: ScoreInterval) {
  return { low: finite(low), high: finite(high), level, ...(reason === undefined ? {} : { reason }) };
}

function errorOf({ biasRatio, rootMeanSquareErrorMmPerHour, relativeErrorPercent }: RelationError) {
  return {
    biasRatio: finite(biasRatio),
    rootMeanSquareErrorMmPerHour: finite(rootMeanSquareErrorMmPerHour),
    relativeErrorPercent: finite(relativeErrorPercent),
  };
}
