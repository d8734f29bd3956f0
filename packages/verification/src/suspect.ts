import { gaugeKey, type Pair } from "@rainreckon/core";
import { median } from "simple-statistics";
import type { GaugeEvidence, GaugeOverride, JudgeContext } from "./evidence.ts";
import { decibels, fromDecibels } from "./numbers.ts";
import { findImpossibleReading, findSpike } from "./reading-checks.ts";
import { findUnitMistake, isNearOne, referenceOf, unitMistakes } from "./unit-checks.ts";
import {
  type CauseName,
  type CheckName,
  type GaugeVerdict,
  type LikelyCause,
  likelyCause,
} from "./verdict.ts";

/** Radar depth over the window from which a gauge can be judged by it. */
const JUDGE_MM = 5;
/** Radar depth that must have fallen on a gauge while it stood still part of the window. */
const SILENT_PART_MM = 10;
/** Radar depth from which a gauge serves as a witness over part of the window. */
const WITNESS_MM = 2;
/** Fewest other gauges that make a reference for units, and witnesses against a silent gauge. */
const LEAST_REFERENCES = 5;
const LEAST_WITNESSES = 3;
/** Radar depth from which an interval shows a ratio. */
const WET_INTERVAL_MM = 0.5;
/** "The usual spread" about the median of the others. */
const USUAL_SPREADS = 3;

/**
 * First doubts about gauges, from their own readings and from the radar and the other gauges.
 *
 * A gauge is doubted only for something that rain cannot do: a reading beyond every record; one
 * reading that neither its neighbours in time nor the radar know of; silence under rain that other
 * gauges confirm; a ratio to the radar on the factor of a mistaken unit, in interval after interval.
 * To be different is no ground: convection is local.
 * The middle of other gauges is a median and their spread a MAD, so that a few bad ones do not move
 * them. A unit is judged against all others and, since one network can be wrong as a whole, against
 * those of other networks alone.
 * An override is obeyed and said; the verdict of the checks stands beside it.
 *
 * @param gauges - all gauges of the run
 * @returns one verdict per gauge, in the same order
 */
export function judgeGauges(gauges: readonly GaugeEvidence[], _context: JudgeContext): GaugeVerdict[] {
  return gauges.map((gauge) => withOverride(judge(gauge, gauges), gauge.override));
}

/** Reasons of the gauges that are not trusted, by `gaugeKey`: what `leaveOut` takes. */
export function leftOutReasons(verdicts: readonly GaugeVerdict[]): Map<string, string> {
  return new Map(
    verdicts
      .filter((verdict) => !verdict.trusted)
      .map((verdict) => [gaugeKey({ network: verdict.network, id: verdict.gaugeId }), verdict.leftOutReason]),
  );
}

type Judgement = Omit<GaugeVerdict, "trusted" | "leftOutReason">;

function judge(gauge: GaugeEvidence, all: readonly GaugeEvidence[]): Judgement {
  const { whole } = gauge;
  const result = (verdict: GaugeVerdict["verdict"], evidence: string): Judgement => ({
    network: whole.network,
    gaugeId: whole.gaugeId,
    verdict,
    cause: undefined,
    findings: [],
    evidence,
  });
  const doubted = ({ cause, evidence, check }: Doubt): Judgement => ({
    ...result("leave out", evidence),
    cause,
    findings: [{ check, speaksFor: cause.name, numbers: {}, sentence: evidence }],
  });
  const ofReadings = doubtOfReadings(gauge);
  if (ofReadings !== undefined) return doubted(ofReadings);
  if (!whole.used) {
    return result("too little rain to judge", `Not compared: ${whole.reason}.`);
  }
  const others = all.filter((other) => other !== gauge && other.whole.used);
  const silent = doubtOfSilence(gauge, others);
  if (silent !== undefined) return doubted(silent);
  const sums = `gauge ${mm(whole.gaugeMm)}, radar ${mm(whole.radarMm)}`;
  if (!(whole.radarMm >= JUDGE_MM)) {
    return result(
      "too little rain to judge",
      `Over the common time: ${sums}; ${JUDGE_MM} mm of radar needed.`,
    );
  }
  const unit = doubtOfUnit(gauge, others);
  if (unit !== undefined) return doubted(unit);
  return result("use", `Over the common time: ${sums}${ratioWords(whole)}.`);
}

interface Doubt {
  readonly cause: LikelyCause;
  readonly evidence: string;
  readonly check: CheckName;
}

function doubt(check: CheckName, name: CauseName, evidence: string, details = ""): Doubt {
  return { check, cause: likelyCause(name, details), evidence };
}

function doubtOfReadings({ series, whole, byInterval }: GaugeEvidence): Doubt | undefined {
  const impossible = findImpossibleReading(series, whole);
  if (impossible !== undefined) {
    const limit =
      impossible.depthMm < 0 ? "rain is never negative" : `the limit is ${mm(impossible.limitMm)}`;
    return doubt(
      "rate limits",
      "impossible-value",
      `${mm(impossible.depthMm)} in ${span(impossible)}; ${limit}.`,
    );
  }
  const spike = findSpike(series, whole, byInterval);
  if (spike !== undefined) {
    const evidence = `${mm(spike.depthMm)} in ${span(spike)}, next to nothing before and after it; the radar saw ${mm(spike.radarMm)} in the interval around it.`;
    return doubt("isolated spike", "spike", evidence);
  }
  return undefined;
}

/** A gauge that read 0 over the window, or over its longest wet run of intervals, while others saw the rain. */
function doubtOfSilence(gauge: GaugeEvidence, others: readonly GaugeEvidence[]): Doubt | undefined {
  const { whole } = gauge;
  if (whole.gaugeMm === 0 && whole.radarMm >= JUDGE_MM) {
    const witnesses = witnessesOf(
      others.map((other) => other.whole).filter((pair) => pair.radarMm >= JUDGE_MM),
    );
    if (witnesses < LEAST_WITNESSES) return undefined;
    const evidence = `0 mm while the radar saw ${mm(whole.radarMm)} over it; ${witnesses} other gauges agree with the radar.`;
    return doubt("silence", "dead", evidence);
  }
  const run = wettestSilentRun(gauge.byInterval);
  if (run === undefined || run.radarMm < SILENT_PART_MM) return undefined;
  const witnesses = witnessesOf(
    others.map((other) => sumOver(other.byInterval, run)).filter((pair) => pair.radarMm >= WITNESS_MM),
  );
  if (witnesses < LEAST_WITNESSES) return undefined;
  const evidence = `0 mm from ${utc(run.startEpochMs)} to ${utc(run.endEpochMs)} while the radar saw ${mm(run.radarMm)} over it; ${witnesses} other gauges agree with the radar over that time.`;
  return doubt("silence", "dies-part-way", evidence);
}

interface Sums {
  readonly gaugeMm: number;
  readonly radarMm: number;
}

/** How many gauges saw rain at a ratio to the radar that is usual among them and near 1. */
function witnessesOf(sums: readonly Sums[]): number {
  const ratios = sums.filter(({ gaugeMm }) => gaugeMm > 0).map(ratioDb);
  if (ratios.length < LEAST_WITNESSES) return 0;
  const reference = referenceOf(ratios);
  if (!isNearOne(reference)) return 0;
  return ratios.filter((ratio) => Math.abs(ratio - reference.medianDb) <= USUAL_SPREADS * reference.spreadDb)
    .length;
}

interface Run extends Sums {
  readonly startEpochMs: number;
  readonly endEpochMs: number;
}

/** The run of used pairs with 0 mm at the gauge that the radar gives most rain; unused pairs end a run. */
function wettestSilentRun(pairs: readonly Pair[]): Run | undefined {
  let best: Run | undefined;
  let run: Run | undefined;
  for (const pair of pairs) {
    if (!pair.used || pair.gaugeMm !== 0) {
      run = undefined;
      continue;
    }
    run = {
      startEpochMs: run?.startEpochMs ?? pair.startEpochMs,
      endEpochMs: pair.endEpochMs,
      gaugeMm: 0,
      radarMm: (run?.radarMm ?? 0) + pair.radarMm,
    };
    if (best === undefined || run.radarMm > best.radarMm) best = run;
  }
  return best;
}

function sumOver(pairs: readonly Pair[], run: Run): Sums {
  let gaugeMm = 0;
  let radarMm = 0;
  for (const pair of pairs) {
    if (!pair.used || pair.startEpochMs < run.startEpochMs || pair.endEpochMs > run.endEpochMs) continue;
    gaugeMm += pair.gaugeMm;
    radarMm += pair.radarMm;
  }
  return { gaugeMm, radarMm };
}

function doubtOfUnit(gauge: GaugeEvidence, others: readonly GaugeEvidence[]): Doubt | undefined {
  const { whole, series } = gauge;
  if (!(whole.gaugeMm > 0)) return undefined;
  const mistakes = unitMistakes(series.stepMs, series.resolutionMm);
  const intervalRatios = gauge.byInterval
    .filter((pair) => pair.used && pair.radarMm >= WET_INTERVAL_MM && pair.gaugeMm > 0)
    .map(ratioDb);
  const elsewhere = others.filter((other) => other.whole.network !== whole.network);
  for (const [peers, words] of [
    [others, "other gauges"],
    [elsewhere, "gauges of other networks"],
  ] as const) {
    const wet = peers.filter((peer) => peer.whole.radarMm >= JUDGE_MM && peer.whole.gaugeMm > 0);
    if (wet.length < LEAST_REFERENCES) continue;
    const reference = referenceOf(wet.map((peer) => ratioDb(peer.whole)));
    const found = findUnitMistake(
      {
        ratioDb: ratioDb(whole),
        intervalRatiosDb: intervalRatios,
        depthDb: decibels(whole.gaugeMm / median(wet.map((peer) => peer.whole.gaugeMm))),
      },
      reference,
      mistakes,
    );
    if (found === undefined) continue;
    const details = found.mistakes.map((mistake) => mistake.words).join(", or ");
    const middle = fromDecibels(reference.medianDb).toFixed(2);
    const evidence = `Gauge ${mm(whole.gaugeMm)}, radar ${mm(whole.radarMm)}: ${times(found.offset)} the median gauge/radar ratio of ${reference.count} ${words} (${middle}), and alike in ${found.fitting} of ${found.intervals} wet intervals.`;
    return doubt("unit", "wrong-unit", evidence, details);
  }
  return undefined;
}

function withOverride(judgement: Judgement, override: GaugeOverride | undefined): GaugeVerdict {
  if (override?.verdict === "leave-out") {
    const leftOutReason = `left out by override: ${overrideWords(override)}`;
    const evidence = `${judgement.evidence} Left out by override: ${overrideWords(override)}.`;
    return { ...judgement, evidence, trusted: false, leftOutReason };
  }
  if (judgement.verdict !== "leave out") return { ...judgement, trusted: true, leftOutReason: "" };
  if (override?.verdict === "use") {
    const evidence = `${judgement.evidence} Used all the same, by override: ${overrideWords(override)}.`;
    return { ...judgement, evidence, trusted: true, leftOutReason: "" };
  }
  return { ...judgement, trusted: false, leftOutReason: `doubted: ${judgement.cause?.words}` };
}

function overrideWords({ reason, by, date }: GaugeOverride): string {
  return `${reason} (${by}, ${date})`;
}

/** Gauge over radar, in decibels. */
function ratioDb({ gaugeMm, radarMm }: Sums): number {
  return decibels(gaugeMm / radarMm);
}

function ratioWords({ gaugeMm, radarMm }: Sums): string {
  return gaugeMm > 0 ? ` (radar/gauge ${(radarMm / gaugeMm).toFixed(2)})` : "";
}

function mm(depth: number): string {
  return `${depth.toFixed(1)} mm`;
}

function times(ratio: number): string {
  return `${ratio >= 1 ? ratio.toFixed(1) : ratio.toFixed(3)} times`;
}

function utc(epochMs: number): string {
  return `${new Date(epochMs).toISOString().slice(0, 16)}Z`;
}

function span({ startEpochMs, endEpochMs }: { startEpochMs: number; endEpochMs: number }): string {
  const minutes = Number(((endEpochMs - startEpochMs) / 60_000).toFixed(2));
  return `${minutes} min to ${utc(endEpochMs)}`;
}
