import {
  type CapSetting,
  gateRate,
  InputError,
  type RateSettings,
  RELATIONS,
  resolveCap,
  type ZrRelation,
} from "@rainreckon/core";
import { displayText } from "@rainreckon/formats";
import { RANK_RULE, type Ranking, type RelationRanks, rankRelations } from "@rainreckon/verification";
import type { LeftOutLog } from "../ui/left-out.ts";
import { decimals } from "../ui/numbers.ts";
import type { Terminal } from "../ui/terminal.ts";
import { hasDoubtfulEcho } from "./measured-pairs.ts";
import { type MeasuredRun, measuredRun, pairIntervals, pairsWith, trustedGauges } from "./measured-run.ts";
import { planConversion } from "./plan-conversion.ts";
import type { RelationRankResult } from "./rank-schema.ts";
import { type NamedRelation, relationsByName } from "./relation-table.ts";

export interface RankOptions {
  readonly target: string;
  readonly plan: string | undefined;
  readonly intervalMinutes: number | undefined;
  readonly order: "alone" | "after-bias";
  /** Undefined is the whole catalogue for rain. */
  readonly relations: readonly string[] | undefined;
  readonly caps: readonly (CapSetting | "none")[];
}

/** One way from reflectivity to rain. */
interface Candidate {
  readonly name: string;
  readonly relation: ZrRelation;
  readonly cap: CapSetting | "none";
}

/** Above any echo. */
const NO_CAP_DBZ = 120;
const DEFAULT_RELATION = "marshall-1955-200/1.6";

/**
 * Relations under the plan's cap, and caps under the plan's relation, ranked at trusted gauges.
 *
 * All rain is made from corrected reflectivity by the relation ranked: what a run makes by other means (phase,
 * relations for showers and for widespread rain) has no part in it.
 *
 * @throws InputError as `measuredRun`; of kind "usage" for relations of snow; where no trusted gauge has a wet pair
 */
export async function rankOf(
  options: RankOptions,
  log: LeftOutLog,
  terminal: Terminal,
): Promise<RelationRankResult> {
  const { target, order } = options;
  const asked =
    options.relations === undefined
      ? RELATIONS.filter(({ phase }) => phase === "rain")
      : relationsByName(options.relations);
  const snow = asked.find(({ phase }) => phase === "snow");
  if (snow !== undefined) {
    throw new InputError(`${snow.name} is a relation for snow`, "--relation", "name relations for rain", {
      kind: "usage",
    });
  }
  const measured = await measuredRun(target, options.plan, log, terminal);
  const { plan } = measured.run.loaded;
  const own = planConversion(plan);
  const ofPlan: Candidate = { name: own.relation.name, relation: own.relation, cap: own.cap };
  // Each name once, the plan's way first.
  const candidates = [
    ...new Map(
      [ofPlan, ...asked.map((one) => candidateOf(one, own.cap))].map((one) => [one.name, one]),
    ).values(),
  ];
  const ranks = new Ranker(measured, options.intervalMinutes, own.minRateMmPerHour);
  const { ranks: relations, doubtfulCount } = ranks.rank(candidates, [ofPlan.name, DEFAULT_RELATION], "rain");
  const caps = uniqueCaps([own.cap, ...options.caps]).map(
    (cap): Candidate => ({ name: capName(cap), relation: own.relation, cap }),
  );
  const { ranks: ofCaps } = ranks.rank(caps, [capName(own.cap)], "everything");
  const { pairCount, gaugeCount, meanGaugeMm } = relations;
  return {
    format: "rainreckon-relation-rank-1",
    source: {
      kind: measured.kind,
      name: displayText(target, 200),
      start: plan.window.from,
      end: plan.window.to,
      intervalMinutes: ranks.intervalMinutes,
      gaugeCount,
      gaugesNotTrusted: measured.gauges.length - trustedGauges(measured).length,
      pairCount,
      pairsOfHailOrSnow: doubtfulCount,
      meanGaugeMm,
      remarks: [...measured.remarks],
    },
    rule: RANK_RULE,
    order,
    plan: { name: ofPlan.name, cap: capName(own.cap) },
    relations: rankingsOf(relations, candidates),
    caps: {
      relation: ofPlan.name,
      pairCount: ofCaps.pairCount,
      atCap: caps
        .map(({ name, relation, cap }) => ({ cap: name, gatesShare: ranks.shareAtCap(relation, cap) }))
        .sort((one, other) => other.gatesShare - one.gatesShare),
      ranks: rankingsOf(ofCaps, caps),
    },
  };
}

function candidateOf(relation: NamedRelation, cap: CapSetting): Candidate {
  return { name: relation.name, relation, cap };
}

function uniqueCaps(caps: readonly (CapSetting | "none")[]): (CapSetting | "none")[] {
  return [...new Map(caps.map((cap) => [capName(cap), cap])).values()];
}

function capName(cap: CapSetting | "none"): string {
  if (cap === "none") return "none";
  return "dbz" in cap ? `${decimals(cap.dbz, 1)} dBZ` : `${decimals(cap.mmPerHour, 1)} mm/h`;
}

/** Depths under candidates at the pairs of trusted gauges. */
class Ranker {
  readonly intervalMinutes: number;
  readonly #measured: MeasuredRun;
  readonly #intervals: ReturnType<typeof pairIntervals>;
  readonly #minRateMmPerHour: number;

  constructor(measured: MeasuredRun, intervalMinutes: number | undefined, minRateMmPerHour: number) {
    this.#measured = measured;
    this.#minRateMmPerHour = minRateMmPerHour;
    this.#intervals = pairIntervals(
      measured,
      intervalMinutes === undefined ? undefined : intervalMinutes * 60_000,
    );
    const [first] = this.#intervals;
    this.intervalMinutes = first === undefined ? 0 : (first.endEpochMs - first.startEpochMs) / 60_000;
  }

  /**
   * @param of - "rain" leaves out pairs with hail, melting snow or snow, which no relation for rain can meet
   * @throws InputError where no trusted gauge has a wet pair
   */
  rank(
    candidates: readonly Candidate[],
    preferred: readonly string[],
    of: "rain" | "everything",
  ): { readonly ranks: RelationRanks; readonly doubtfulCount: number } {
    const gaugeMm: number[] = [];
    const gaugeOf: number[] = [];
    const radarMm: number[][] = candidates.map(() => []);
    const gauges = trustedGauges(this.#measured);
    let doubtfulCount = 0;
    for (const [g, gauge] of gauges.entries()) {
      const pairsOf = (candidate: Candidate, doubtfulOnly = false) => {
        const settings = this.#settings(candidate.relation, candidate.cap);
        const depth = gauge.echo.integral((dbz) => gateRate(dbz, settings).rate, doubtfulOnly);
        return pairsWith(this.#measured, gauge, depth, this.#intervals);
      };
      // By the first candidate for all, so that all are held against the same pairs.
      const first = candidates[0] as Candidate;
      const doubtful = pairsOf(first, true);
      const counts = pairsOf(first).map(({ used, radarMm: all }, k) => {
        if (!used || of === "everything" || !hasDoubtfulEcho(all, doubtful[k]?.radarMm)) return used;
        doubtfulCount++;
        return false;
      });
      for (const [c, candidate] of candidates.entries()) {
        for (const [k, pair] of pairsOf(candidate).entries()) {
          if (counts[k] !== true) continue;
          radarMm[c]?.push(pair.radarMm);
          if (c > 0) continue;
          gaugeMm.push(pair.gaugeMm);
          gaugeOf.push(g);
        }
      }
    }
    const { pairs, bootstrap } = this.#measured.run.loaded.plan;
    const isWet = gaugeMm.some(
      (mm, i) => Math.max(mm, ...radarMm.map((ofOne) => ofOne[i] as number)) >= pairs.thresholdMm,
    );
    if (!isWet) {
      throw new InputError(
        "no trusted gauge has a pair with rain on either side, and without hail or snow",
        displayText(this.#measured.target, 200),
        "take a window with rain, and see gauges.csv for why gauges are not trusted",
        { kind: "no-input" },
      );
    }
    const ranks = rankRelations({
      gaugeMm: Float64Array.from(gaugeMm),
      gaugeOf: Uint32Array.from(gaugeOf),
      gaugeCount: gauges.length,
      candidates: candidates.map(({ name }, c) => ({ name, radarMm: Float64Array.from(radarMm[c] ?? []) })),
      preferred,
      thresholdMm: pairs.thresholdMm,
      bootstrap,
    });
    return { ranks, doubtfulCount };
  }

  /** Share of the uncapped rain over trusted gauges that comes from gates at or above a cap. */
  shareAtCap(relation: ZrRelation, cap: CapSetting | "none"): number {
    const open = this.#settings(relation, "none");
    const { dbz } = this.#settings(relation, cap).cap;
    let all = 0;
    let above = 0;
    for (const { echo } of trustedGauges(this.#measured)) {
      const total = (part: Float64Array) => part.reduce((sum, mm) => (mm > 0 ? sum + mm : sum), 0);
      all += total(echo.integral((one) => gateRate(one, open).rate));
      above += total(echo.integral((one) => (one >= dbz ? gateRate(one, open).rate : 0)));
    }
    return all > 0 ? above / all : 0;
  }

  #settings(relation: ZrRelation, cap: CapSetting | "none"): RateSettings {
    return {
      relation,
      cap: resolveCap(cap === "none" ? { dbz: NO_CAP_DBZ } : cap, relation),
      minRateMmPerHour: this.#minRateMmPerHour,
      offsetDb: 0,
    };
  }
}

function rankingsOf({ alone, afterBias }: RelationRanks, candidates: readonly Candidate[]) {
  const byName = new Map(candidates.map((candidate) => [candidate.name, candidate]));
  const rankingOf = ({ relations, best, chosen, choiceErrorMm, chosenInFolds }: Ranking) => ({
    rows: relations.map(({ interval, ...row }) => {
      const { relation, cap } = byName.get(row.name) as Candidate;
      return {
        name: row.name,
        a: relation.a,
        b: relation.b,
        cap: capName(cap),
        biasRatio: finite(row.biasRatio),
        errorMm: finite(row.errorMm),
        errorPercent: finite(row.errorPercent),
        sumErrorMm: finite(row.sumErrorMm),
        moreThanBestMm: finite(row.moreThanBestMm),
        interval: {
          low: finite(interval.low),
          high: finite(interval.high),
          level: interval.level,
          ...(interval.reason === undefined ? {} : { reason: interval.reason }),
        },
        toldApart: row.toldApart,
      };
    }),
    best,
    chosen,
    choiceErrorMm: finite(choiceErrorMm),
    chosenInFolds: Object.fromEntries(chosenInFolds),
  });
  return { alone: rankingOf(alone), afterBias: rankingOf(afterBias) };
}

function finite(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}
