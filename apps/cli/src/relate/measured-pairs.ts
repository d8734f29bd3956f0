import { decibels, type PairUnits, type PowerLaw, type ZrPairs } from "@rainreckon/verification";
import { type MeasuredRun, pairIntervals, pairsWith, trustedGauges } from "./measured-run.ts";

/** Share of an interval's rain that may come from hail, melting snow or snow before its pair is left out. House rule. */
const MOST_DOUBTFUL = 0.1;

/** Pairs of reflectivity and rain rate, what they have in common, and what became of the others. */
export interface FitPairs {
  readonly pairs: ZrPairs;
  readonly units: PairUnits;
  readonly gaugeCount: number;
  /** Of each pair by interval. */
  readonly intervalMinutes: number | undefined;
  /** Why pairs took no part, most frequent first. */
  readonly leftOut: readonly { readonly reason: string; readonly count: number }[];
  /** Share of the reflectivity's rain that came from gates at or above a cap, by the exponent of the averaging. */
  readonly cappedShare: number;
}

/**
 * Pairs of a run. The reflectivity of a pair is the one that, had it stood over the gauge all along, would have given
 * the same depth as the reflectivities that did: (mean of Z^(1/b))^b over gates and time, with the b given. With b = 1
 * it is the plain mean of Z.
 *
 * Only trusted gauges count, and only intervals with next to no hail, melting snow or snow.
 *
 * @param exponent - b of the averaging
 * @param intervalMs - undefined is the plan's pair interval
 * @param capDbz - reflectivity whose share is told
 */
export function fitPairsOf(
  measured: MeasuredRun,
  exponent: number,
  intervalMs: number | undefined,
  capDbz: number,
): FitPairs {
  const intervals = pairIntervals(measured, intervalMs);
  const rootOf = (dbz: number) => 10 ** (dbz / (10 * exponent));
  const dbz: number[] = [];
  const rates: number[] = [];
  const gaugeOf: number[] = [];
  const timeOf: number[] = [];
  const reasons = new Map<string, number>();
  let root = 0;
  let cappedRoot = 0;
  const trusted = trustedGauges(measured);
  for (const [g, gauge] of trusted.entries()) {
    const made = (integral: Float64Array) => pairsWith(measured, gauge, integral, intervals);
    const all = made(gauge.echo.integral(rootOf));
    const doubtful = made(gauge.echo.integral(rootOf, true));
    const capped = made(gauge.echo.integral((one) => (one >= capDbz ? rootOf(one) : 0)));
    for (const [k, pair] of all.entries()) {
      const commonHours = (pair.commonFraction * (pair.endEpochMs - pair.startEpochMs)) / 3_600_000;
      const isDoubtful = pair.used && hasDoubtfulEcho(pair.radarMm, doubtful[k]?.radarMm);
      const why = isDoubtful ? DOUBTFUL_ECHO : pair.reason;
      if (why !== "") {
        reasons.set(why, (reasons.get(why) ?? 0) + 1);
        continue;
      }
      dbz.push(exponent * decibelsOrNone(pair.radarMm / commonHours));
      rates.push(pair.gaugeMm / commonHours);
      gaugeOf.push(g);
      timeOf.push(k);
      root += pair.radarMm;
      cappedRoot += capped[k]?.radarMm ?? 0;
    }
  }
  const untrusted = (measured.gauges.length - trusted.length) * intervals.length;
  if (untrusted > 0) reasons.set("the gauge is not trusted", untrusted);
  const { blockMinutes } = measured.run.loaded.plan.bootstrap;
  const lengthMs = (intervals[0]?.endEpochMs ?? 0) - (intervals[0]?.startEpochMs ?? 0);
  return {
    pairs: { dbz: Float64Array.from(dbz), rateMmPerHour: Float64Array.from(rates) },
    units: {
      gaugeOf: Uint32Array.from(gaugeOf),
      gaugeCount: Math.max(1, trusted.length),
      timeOf: Uint32Array.from(timeOf),
      timeCount: intervals.length,
      blockLength: Math.min(
        intervals.length,
        Math.max(1, Math.round((blockMinutes * 60_000) / Math.max(1, lengthMs))),
      ),
    },
    gaugeCount: new Set(gaugeOf).size,
    intervalMinutes: lengthMs / 60_000,
    leftOut: [...reasons]
      .map(([reason, count]) => ({ reason, count }))
      .sort((one, other) => other.count - one.count || (one.reason < other.reason ? -1 : 1)),
    cappedShare: root > 0 ? cappedRoot / root : 0,
  };
}

/** Why a pair says nothing of a relation for rain. */
const DOUBTFUL_ECHO = "hail, melting snow or snow had a part in the echo";

/**
 * Whether too much of a pair's rain comes from hail, melting snow or snow.
 *
 * @param all - an integral of its echo; `doubtful` the same over such gates alone
 */
export function hasDoubtfulEcho(all: number, doubtful: number | undefined): boolean {
  return all > 0 && (doubtful ?? 0) > MOST_DOUBTFUL * all;
}

/** Decibels, with -Infinity for 0: observed, below detection. */
function decibelsOrNone(value: number): number {
  return value > 0 ? decibels(value) : Number.NEGATIVE_INFINITY;
}

/** Rounds after which averaging and fit no longer move each other, and what counts as not moving. */
const MOST_ROUNDS = 8;
const SETTLED = 0.005;

/**
 * Pairs averaged with the exponent that they themselves lead to.
 *
 * @param pairsAt - pairs for an exponent of the averaging
 * @param lawOf - what is fitted to them; NaN where nothing is
 * @param start - exponent to begin with
 */
export function settledPairs<P>(
  pairsAt: (exponent: number) => P,
  lawOf: (pairs: P) => PowerLaw,
  start: number,
): { readonly pairs: P; readonly exponent: number } {
  let exponent = start;
  let pairs = pairsAt(exponent);
  for (let round = 0; round < MOST_ROUNDS; round++) {
    const { b } = lawOf(pairs);
    if (!(b > 0) || Math.abs(b - exponent) < SETTLED) break;
    exponent = b;
    pairs = pairsAt(exponent);
  }
  return { pairs, exponent };
}
