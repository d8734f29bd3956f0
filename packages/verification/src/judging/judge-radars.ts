import type { OverlapDifference, Pair } from "@rainreckon/core";
import type { GaugeEvidence } from "../evidence.ts";
import { decibels } from "../numbers.ts";
import { ratioStandardError } from "../ratio-error.ts";
import {
  type BiasGroup,
  CAUSES,
  type CauseName,
  type GaugeVerdict,
  type LikelyCause,
  likelyCause,
  type NeighbourBias,
  type RadarVerdict,
  type Verdict,
} from "../verdict.ts";
import { mm, utc } from "./words.ts";

/** Trusted gauges and their rain from which a radar, or a part of its view, can be judged. House rule. */
const LEAST_GAUGES = 3;
const LEAST_MM = 10;
/** Bias from which a radar is used with care, and from which it is left out, dB. House rule: a factor of 1.4 and of 4. */
const CARE_DB = 1.5;
const LEAVE_OUT_DB = 6;
/** By how much a part of the view must differ from the whole, and a radar from its neighbour, dB. */
const PART_DB = 3;
const NEIGHBOUR_DB = 2;
/** Standard errors to the ends of an interval of 95 %. */
const Z95 = 1.96;

const SECTORS = ["N", "NE", "E", "SE", "S", "SW", "W", "NW"] as const;

/** What radars are judged by beside the gauges. */
export interface RadarContext {
  /** In the order of the verdicts. */
  readonly radarIds: readonly string[];
  /** Upper ends of the bands of range, km, ascending; the last band is open. */
  readonly rangeBandsKm: readonly number[];
  /** How much more one radar shows than another in the same rain, as learned from their scans. */
  readonly overlaps: readonly OverlapDifference[];
}

/**
 * What the trusted gauges and its neighbours make of each radar: its bias over all, by range, by sector and over time.
 *
 * A gauge counts for the radar that speaks loudest over it. A bias is a ratio of sums radar/gauge with an interval
 * of 95 % by the jackknife over gauges. A radar is used with care where its bias, or that of a part of its view beside
 * the whole, or the difference to a neighbour is large and not by chance; it is left out where it is off by a factor of four.
 * In real time a mean-field bias takes the level away; what a range or a sector has in excess stays.
 *
 * @param gauges - as for `judgeGauges`
 * @param verdicts - in the same order
 */
export function judgeRadars(
  gauges: readonly GaugeEvidence[],
  verdicts: readonly GaugeVerdict[],
  { radarIds, rangeBandsKm, overlaps }: RadarContext,
): RadarVerdict[] {
  return radarIds.map((radarId) => {
    const own = gauges
      .map((gauge, g) => ({ gauge, verdict: verdicts[g] as GaugeVerdict }))
      .filter(({ gauge, verdict }) => verdict.trusted && gauge.whole.used && gauge.whole.radarId === radarId);
    const wholes = own.map(({ gauge }) => gauge.whole);
    const whole = biasOf("", wholes);
    const byRange = bandsOf(rangeBandsKm).flatMap(({ label, holds }) =>
      filled(
        biasOf(
          label,
          wholes.filter(({ rangeKm }) => holds(rangeKm)),
        ),
      ),
    );
    const bySector = SECTORS.flatMap((label, sector) =>
      filled(
        biasOf(
          label,
          own
            .filter(({ gauge }) => sectorOf(gauge.sight.azimuthDeg) === sector)
            .map(({ gauge }) => gauge.whole),
        ),
      ),
    );
    const againstNeighbours = neighboursOf(radarId, overlaps);
    const parts = {
      whole,
      byRange,
      bySector,
      overTime: overTime(own.map(({ gauge }) => gauge)),
      againstNeighbours,
    };
    return { radarId, ...decide(radarId, parts, own), ...parts };
  });
}

type Parts = Pick<RadarVerdict, "whole" | "byRange" | "bySector" | "overTime" | "againstNeighbours">;

function decide(
  radarId: string,
  { whole, byRange, bySector, againstNeighbours }: Parts,
  own: readonly { readonly gauge: GaugeEvidence; readonly verdict: GaugeVerdict }[],
): { readonly verdict: Verdict; readonly cause: LikelyCause | undefined; readonly sentence: string } {
  const neighbour = againstNeighbours.find(
    ({ differenceDb, lowDb, highDb }) => Math.abs(differenceDb) >= NEIGHBOUR_DB && lowDb * highDb > 0,
  );
  const neighbourWords =
    neighbour === undefined
      ? ""
      : ` It shows ${Math.abs(neighbour.differenceDb).toFixed(1)} dB ${neighbour.differenceDb > 0 ? "more" : "less"} than ${neighbour.radarId} in the same rain.`;
  if (whole.gauges < LEAST_GAUGES || !(whole.gaugeMm >= LEAST_MM)) {
    return {
      verdict: "too little rain to judge",
      cause: undefined,
      sentence: `${radarId}: ${whole.gauges} trusted gauges with ${mm(whole.gaugeMm)} in all; it takes ${LEAST_GAUGES} with ${mm(LEAST_MM)}.${neighbourWords}`,
    };
  }
  const said = `${radarId} has ${whole.ratio.toFixed(2)} times the rain of ${whole.gauges} trusted gauges (95 %: ${whole.low.toFixed(2)} to ${whole.high.toFixed(2)}).`;
  const wholeDb = decibels(whole.ratio);
  const isReal = whole.low > 1 || whole.high < 1;
  if (isReal && Math.abs(wholeDb) >= CARE_DB) {
    const verdict = Math.abs(wholeDb) >= LEAVE_OUT_DB ? "leave out" : "use with care";
    return { verdict, cause: likelyCause("radar-level"), sentence: `${said}${neighbourWords}` };
  }
  const part = [...bySector, ...byRange]
    .filter(({ gauges, low, high }) => gauges >= LEAST_GAUGES && (low > whole.ratio || high < whole.ratio))
    .map((group) => ({ group, offDb: decibels(group.ratio / whole.ratio) }))
    .filter(({ offDb }) => Math.abs(offDb) >= PART_DB)
    .sort((a, b) => Math.abs(b.offDb) - Math.abs(a.offDb))[0];
  if (part !== undefined) {
    const { label, ratio, gauges } = part.group;
    const cause = commonestCause(own);
    return {
      verdict: "use with care",
      cause: cause === undefined ? undefined : likelyCause(cause),
      sentence: `${said} In ${label} it has ${ratio.toFixed(2)} times that of ${gauges} gauges.${neighbourWords}`,
    };
  }
  if (neighbour !== undefined) {
    return {
      verdict: "use with care",
      cause: likelyCause("radar-level"),
      sentence: `${said}${neighbourWords}`,
    };
  }
  return { verdict: "use", cause: undefined, sentence: said };
}

/** The cause on the radar's side that most of its gauges name. */
function commonestCause(own: readonly { readonly verdict: GaugeVerdict }[]): CauseName | undefined {
  const counts = new Map<CauseName, number>();
  for (const { verdict } of own) {
    const name = verdict.cause?.name;
    if (name !== undefined && CAUSES[name].blame === "radar") counts.set(name, (counts.get(name) ?? 0) + 1);
  }
  return [...counts].sort((a, b) => b[1] - a[1])[0]?.[0];
}

/** Ratio of sums with its interval: logarithm of the ratio, jackknife over the pairs' gauges. */
function biasOf(label: string, pairs: readonly Pair[]): BiasGroup {
  const radar = pairs.map(({ radarMm }) => radarMm);
  const gauge = pairs.map(({ gaugeMm }) => gaugeMm);
  const { ratio, jackknife } = ratioStandardError(radar, gauge);
  const reach = Math.exp((studentFactor(pairs.length) * jackknife) / ratio);
  const sum = (values: readonly number[]) => values.reduce((total, value) => total + value, 0);
  return {
    label,
    gauges: pairs.length,
    gaugeMm: sum(gauge),
    radarMm: sum(radar),
    ratio,
    low: ratio / reach,
    high: ratio * reach,
  };
}

/** Two-sided 95 % of Student's t with n - 1 degrees, by Abramowitz and Stegun (1964), eq. 26.7.5, to the second order. */
function studentFactor(n: number): number {
  const degrees = n - 1;
  if (degrees < 1) return Number.NaN;
  const first = (Z95 ** 3 + Z95) / 4;
  const second = (5 * Z95 ** 5 + 16 * Z95 ** 3 + 3 * Z95) / 96;
  return Z95 + first / degrees + second / degrees ** 2;
}

function filled(group: BiasGroup): BiasGroup[] {
  return group.gauges === 0 ? [] : [group];
}

function bandsOf(upperKm: readonly number[]): { label: string; holds: (km: number) => boolean }[] {
  const bands = upperKm.map((to, i) => {
    const from = upperKm[i - 1] ?? 0;
    return { label: `${from}-${to} km`, holds: (km: number) => km >= from && km < to };
  });
  const last = upperKm.at(-1) ?? 0;
  return [...bands, { label: `from ${last} km`, holds: (km: number) => km >= last }];
}

/** Index of {@link SECTORS}; -1 where the direction is not known. */
function sectorOf(azimuthDeg: number): number {
  return Number.isNaN(azimuthDeg) ? -1 : Math.round(azimuthDeg / 45) % SECTORS.length;
}

/** By interval, over the gauges that were used in it. */
function overTime(gauges: readonly GaugeEvidence[]): BiasGroup[] {
  const byStart = new Map<number, Pair[]>();
  for (const { byInterval } of gauges) {
    for (const pair of byInterval) {
      if (pair.used) byStart.set(pair.startEpochMs, [...(byStart.get(pair.startEpochMs) ?? []), pair]);
    }
  }
  return [...byStart]
    .sort(([a], [b]) => a - b)
    .map(([start, pairs]) => biasOf(`${utc(start)} to ${utc((pairs[0] as Pair).endEpochMs)}`, pairs));
}

function neighboursOf(radarId: string, overlaps: readonly OverlapDifference[]): NeighbourBias[] {
  return overlaps.flatMap(({ oneSiteId, otherSiteId, valueDb, standardErrorDb, sampleCount }) => {
    if (oneSiteId !== radarId && otherSiteId !== radarId) return [];
    const differenceDb = oneSiteId === radarId ? valueDb : -valueDb;
    return [
      {
        radarId: oneSiteId === radarId ? otherSiteId : oneSiteId,
        n: sampleCount,
        differenceDb,
        lowDb: differenceDb - Z95 * standardErrorDb,
        highDb: differenceDb + Z95 * standardErrorDb,
      },
    ];
  });
}
