import { gaugeKey } from "@rainreckon/core";
import type { BiasGroup, LikelyCause, RadarVerdict } from "@rainreckon/verification";
import type { ComparedGauge, Comparison } from "../total/against-gauges.ts";
import type { PreparedRun } from "../total/prepare.ts";
import { isoUtc } from "../ui/numbers.ts";
import type { CheckDocument, CheckedGauge, CheckedRadar } from "./schema.ts";
import { trustSentence } from "./trust.ts";

/** The file of a run that holds what its checks came to. */
export const CHECKS_FILE = "checks.json";

/** Verdicts in the order in which people want to read them: what is worst first. */
const ORDER = ["leave out", "use with care", "too little rain to judge", "use"] as const;

/** Everything that the checks of a run came to. */
export function checkDocument(run: PreparedRun, comparison: Comparison): CheckDocument {
  const { plan } = run.loaded;
  const gauges = comparison.gauges.map((gauge) => checkedGauge(gauge, run)).sort(worstFirst);
  const radars = comparison.radars.map(checkedRadar);
  const count = (verdict: CheckedGauge["verdict"]) =>
    gauges.filter((gauge) => gauge.verdict === verdict).length;
  return {
    format: "rainreckon-check-1",
    title: plan.title,
    status: plan.status,
    window: {
      start: isoUtc(run.window.startEpochMs),
      end: isoUtc(run.window.endEpochMs),
      zone: plan.window.zone,
    },
    trust: trustSentence(gauges, radars),
    counts: {
      use: count("use"),
      useWithCare: count("use with care"),
      leaveOut: count("leave out"),
      tooLittleRain: count("too little rain to judge"),
    },
    gauges,
    radars,
  };
}

function worstFirst(a: CheckedGauge, b: CheckedGauge): number {
  const rank = (gauge: CheckedGauge) => ORDER.indexOf(gauge.verdict) + (gauge.cause === null ? 0.5 : 0);
  // A gauge at 0 is infinitely far from the radar.
  const size = ({ ratioDb, gaugeMm, radarMm }: CheckedGauge) =>
    Math.abs(ratioDb ?? (gaugeMm === 0 && (radarMm ?? 0) > 0 ? Number.MAX_VALUE : 0));
  return rank(a) - rank(b) || size(b) - size(a) || (keyOf(a) < keyOf(b) ? -1 : 1);
}

function keyOf({ network, gaugeId }: CheckedGauge): string {
  return gaugeKey({ network, id: gaugeId });
}

function checkedGauge({ gauge, verdict, whole }: ComparedGauge, run: PreparedRun): CheckedGauge {
  const { series, station } = gauge;
  const override = run.loaded.plan.overrides.find(
    (one) => one.network === series.network && one.gauge === series.id,
  );
  return {
    network: series.network,
    gaugeId: series.id,
    name: station.name ?? "",
    verdict: verdict.verdict,
    cause: causeOf(verdict.cause),
    gaugeMm: orNull(whole.gaugeMm),
    radarMm: orNull(whole.radarMm),
    ratioDb: orNull(10 * Math.log10(whole.radarMm / whole.gaugeMm)),
    evidence: verdict.evidence,
    trusted: verdict.trusted,
    override:
      override === undefined
        ? null
        : { verdict: override.verdict, reason: override.reason, by: override.by, date: override.date },
    findings: verdict.findings.map(({ check, speaksFor, numbers, sentence }) => ({
      check,
      speaksFor,
      numbers: Object.fromEntries(Object.entries(numbers).map(([name, value]) => [name, orNull(value)])),
      sentence,
    })),
  };
}

function checkedRadar(radar: RadarVerdict): CheckedRadar {
  return {
    radarId: radar.radarId,
    verdict: radar.verdict,
    cause: causeOf(radar.cause),
    sentence: radar.sentence,
    whole: biasOf(radar.whole),
    byRange: radar.byRange.map(biasOf),
    bySector: radar.bySector.map(biasOf),
    overTime: radar.overTime.map(biasOf),
    againstNeighbours: radar.againstNeighbours.map(({ radarId, n, differenceDb, lowDb, highDb }) => ({
      radarId,
      n,
      differenceDb: orNull(differenceDb),
      lowDb: orNull(lowDb),
      highDb: orNull(highDb),
    })),
  };
}

function biasOf({ label, gauges, gaugeMm, radarMm, ratio, low, high }: BiasGroup) {
  return {
    label,
    gauges,
    gaugeMm: orNull(gaugeMm),
    radarMm: orNull(radarMm),
    ratio: orNull(ratio),
    low: orNull(low),
    high: orNull(high),
  };
}

function causeOf(cause: LikelyCause | undefined): CheckedGauge["cause"] {
  return cause === undefined ? null : { ...cause };
}

function orNull(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}
