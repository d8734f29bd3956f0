import type { Interval } from "@rainreckon/core";
import type { GaugeEvidence, JudgeContext } from "../evidence.ts";
import { gaugeSteps } from "../gauge-steps.ts";
import { fromDecibels } from "../numbers.ts";
import type { CauseName, CheckName, Finding } from "../verdict.ts";
import type { Account } from "./account.ts";
import { findLateRelease, findOddResolution, findRepeatedValue, findTestTips } from "./alone.ts";
import { distanceKm } from "./neighbours.ts";
import { rememberedBy } from "./remembered.ts";
import { mm, span, utc } from "./words.ts";

/** Readings on end of one depth from which a line is flat rather than a value repeated. */
const FLAT_READINGS = 24;
/** Share of the window without readings from which a gauge is used with care. House rule. */
const MISSING_SHARE = 0.2;
/** Share of readings off the stated tip that counts. */
const ODD_SHARE = 0.1;
/** How far away rain at another gauge says that it was not dry. */
const DRY_KM = 30;
/** What the radar may have in a dry time, mm. */
const DRY_MM = 0.05;
/** Readings with rain, and depth, from which two gauges cannot be alike by chance. House rule. */
const TWIN_READINGS = 12;
const TWIN_MM = 3;
/** Share of the radar's depth in snow or melting snow from which a late drip may be melt. */
const COLD_SHARE = 0.3;

/** What a gauge's own readings say of it; the radar and other gauges are asked only whether it was dry. */
export function findingsAlone(
  { subject, levelDb }: Account,
  gauges: readonly GaugeEvidence[],
  { window }: JudgeContext,
): Finding[] {
  const { evidence, impossible, spike, steps } = subject;
  const { series, rowFaults } = evidence;
  const tipMm = steps?.tipMm ?? series.resolutionMm ?? 0.2;
  const level = fromDecibels(levelDb);
  const found: Finding[] = [];
  const add = (
    check: CheckName,
    speaksFor: CauseName,
    numbers: Readonly<Record<string, number>>,
    sentence: string,
  ) => found.push({ check, speaksFor, numbers, sentence });
  if (impossible !== undefined) {
    const limit =
      impossible.depthMm < 0 ? "rain is never negative" : `the limit is ${mm(impossible.limitMm)}`;
    const { depthMm, limitMm } = impossible;
    const sentence = `${mm(depthMm)} in ${span(impossible)}; ${limit}.`;
    add("rate limits", "impossible-value", { depthMm, limitMm, settled: 0 }, sentence);
  } else if (rowFaults !== undefined && rowFaults.impossible > 0) {
    const { impossible: count } = rowFaults;
    const sentence = `${count} readings of its files cannot be and are not observed.`;
    add("rate limits", "impossible-value", { readings: count, settled: 1 }, sentence);
  }
  if (spike !== undefined) {
    const { depthMm, radarMm } = spike;
    const sentence = `${mm(depthMm)} in ${span(spike)}, next to nothing before and after it; the radar saw ${mm(radarMm)} in the half hour around it.`;
    add("isolated spike", "spike", { depthMm, radarMm, settled: 0 }, sentence);
  }
  const repeated = findRepeatedValue(series, window, tipMm, (time) => level * radarOver(evidence, time));
  if (repeated !== undefined) {
    const isFlat = repeated.count >= FLAT_READINGS;
    add(
      isFlat ? "flat line" : "repeated value",
      isFlat ? "flat-line" : "repeated-value",
      { readings: repeated.count, eachMm: repeated.eachMm, settled: 0 },
      `${repeated.count} readings on end of ${repeated.eachMm.toFixed(2)} mm up to ${utc(repeated.endEpochMs)}: rain changes.`,
    );
  }
  if (rowFaults !== undefined && rowFaults.counterResets > 0) {
    const sentence = `Its counter started again ${rowFaults.counterResets} times: what was lost is not known.`;
    add("counter resets", "counter-reset", { resets: rowFaults.counterResets }, sentence);
  }
  if (rowFaults !== undefined && rowFaults.duplicateRows > 0) {
    const sentence = `${rowFaults.duplicateRows} rows of its files give an instant twice and count once.`;
    add("duplicates", "duplicate", { rows: rowFaults.duplicateRows }, sentence);
  }
  const twin = twinOf(evidence, gauges);
  if (twin !== undefined) {
    const sentence = `All its ${twin.readings} readings with rain are those of gauge ${twin.of.series.id} of network ${twin.of.series.network}.`;
    add("duplicates", "duplicate", { sameReadings: twin.readings }, sentence);
  }
  // Of tips that come one by one nothing is missing: no line means no tip.
  const missing =
    1 -
    gaugeSteps(series, window.startEpochMs, window.endEpochMs - window.startEpochMs, 1).observedFraction[0];
  if (series.stepMs !== undefined && missing > MISSING_SHARE) {
    const sentence = `It has no readings for ${Math.round(100 * missing)} % of the window.`;
    add("missing readings", "missing-readings", { missingShare: missing }, sentence);
  }
  const odd = findOddResolution(
    series,
    window,
    series.stepMs === undefined ? undefined : series.resolutionMm,
  );
  if (odd !== undefined && odd.odd > ODD_SHARE * odd.count) {
    const sentence = `${odd.odd} of ${odd.count} readings with rain are no multiples of ${series.resolutionMm} mm.`;
    add("tip resolution", "odd-resolution", { odd: odd.odd, readings: odd.count }, sentence);
  }
  const dry = (time: Interval) => wasDry(evidence, gauges, time);
  const test = findTestTips(series, window, tipMm, dry);
  if (test !== undefined) {
    const sentence = `${test.count} readings with ${mm(test.depthMm)} up to ${utc(test.endEpochMs)}, when neither the radar nor a gauge within ${DRY_KM} km had rain for hours.`;
    add("test tips", "test-tips", { depthMm: test.depthMm, readings: test.count }, sentence);
  }
  const late = findLateRelease(series, window, tipMm, dry);
  if (late !== undefined) {
    const { meltingFraction, snowFraction } = evidence.sight;
    const isCold = evidence.heated !== true && Math.max(meltingFraction, snowFraction) >= COLD_SHARE;
    const sentence = `${late.count} single tips with ${mm(late.depthMm)} from ${utc(late.startEpochMs)} to ${utc(late.endEpochMs)}, when it rained nowhere near${isCold ? "; the radar saw snow, so melt is possible (no temperature is known)" : ""}.`;
    add(
      isCold ? "melt" : "late release",
      isCold ? "melt" : "late-release",
      { depthMm: late.depthMm },
      sentence,
    );
  }
  return found;
}

/** Radar depth over a gauge on the steps that a time touches; NaN where one of them was not observed, or none is known. */
function radarOver({ radar }: GaugeEvidence, { startEpochMs, endEpochMs }: Interval): number {
  const first = Math.max(0, Math.floor((startEpochMs - radar.startEpochMs) / radar.stepMs));
  const end = Math.min(radar.depthMm.length, Math.ceil((endEpochMs - radar.startEpochMs) / radar.stepMs));
  let sum = end > first ? 0 : Number.NaN;
  for (let step = first; step < end; step++) {
    sum += radar.observedFraction[step] > 0 ? radar.depthMm[step] : Number.NaN;
  }
  return sum;
}

/** Whether neither the radar over a gauge nor a gauge within 30 km had rain, and the radar observed all of it. */
function wasDry(
  gauge: GaugeEvidence,
  gauges: readonly GaugeEvidence[],
  { startEpochMs, endEpochMs }: Interval,
): boolean {
  if (!(radarOver(gauge, { startEpochMs, endEpochMs }) <= DRY_MM)) return false;
  return gauges.every((other) => {
    if (other === gauge || distanceKm(other, gauge) > DRY_KM) return true;
    const depth = gaugeSteps(other.series, startEpochMs, Math.max(1, endEpochMs - startEpochMs), 1)
      .depthMm[0];
    return !(depth > 0);
  });
}

/** Another gauge, earlier in the list, with the very same readings. */
function twinOf(
  gauge: GaugeEvidence,
  gauges: readonly GaugeEvidence[],
): { readonly of: GaugeEvidence; readonly readings: number } | undefined {
  const own = wetReadings(gauge);
  if (own.size < TWIN_READINGS || [...own.values()].reduce((sum, depth) => sum + depth, 0) < TWIN_MM)
    return undefined;
  for (const other of gauges) {
    if (other === gauge) return undefined;
    const theirs = wetReadings(other);
    if (theirs.size !== own.size) continue;
    if ([...own].every(([endEpochMs, depth]) => theirs.get(endEpochMs) === depth)) {
      return { of: other, readings: own.size };
    }
  }
  return undefined;
}

/** All readings with rain by their ends: a copy is one before and after the window too. */
const wetReadings = rememberedBy(({ series }: GaugeEvidence): Map<number, number> => {
  const readings = new Map<number, number>();
  for (let i = 0; i < series.depthMm.length; i++) {
    if (series.depthMm[i] > 0) readings.set(series.endEpochMs[i], series.depthMm[i]);
  }
  return readings;
});
