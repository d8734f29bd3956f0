import { counted, depthText, lengthText } from "../ui/numbers.ts";
import type { EventAccount, Peak, PlaceReport } from "./schema.ts";

const MINUTE_MS = 60_000;

/** A depth in mm, "≥" before what is a lower bound. */
export function boundedText(mm: number | null, lowerBound: boolean): string {
  return mm === null ? "–" : `${lowerBound ? "≥ " : ""}${depthText(mm)}`;
}

/** A share in whole per cent, never rounded up to all of it. */
export function shareText(share: number): string {
  return share > 0.995 && share < 1 ? ">99 %" : `${Math.floor(100 * share)} %`;
}

/** What belongs to the depth of the window at a place. */
export function windowDetails({ window, figure, kind }: PlaceReport): string[] {
  return [
    figure === "adjusted" ? "radar adjusted to gauges" : "radar alone",
    `observed ${shareText(window.observedFraction)}`,
    ...(window.atCap ? ["at cap: a lower bound"] : []),
    ...(figure === "adjusted" ? [`${depthText(window.radarMm)} mm before adjustment`] : []),
    ...(window.gaugesOnlyMm === null ? [] : [`${depthText(window.gaugesOnlyMm)} mm by the gauges alone`]),
    ...(window.range3x3 === null
      ? []
      : [
          `${depthText(window.range3x3.leastMm)} to ${depthText(window.range3x3.mostMm)} mm in the ${window.range3x3.cellCount} cells about it`,
        ]),
    window.p10Mm === null || window.p90Mm === null
      ? "how sure it is the run does not say"
      : `p10 to p90 ${depthText(window.p10Mm)} to ${depthText(window.p90Mm)} mm`,
    ...(kind === "catchment" && window.volumeM3 !== null ? [`${volumeText(window.volumeM3)} m3`] : []),
  ];
}

/** What belongs to an event beside its depth and its times. */
export function eventDetails(event: EventAccount): string[] {
  const before = event.antecedent.map(
    ({ hours, depthMm, lowerBound, observedFraction }) =>
      `${hours} h ${observedFraction === 0 ? "not known" : `${boundedText(depthMm, lowerBound)} mm`}`,
  );
  return [
    ...(event.p10Mm === null || event.p90Mm === null
      ? []
      : [`p10 to p90 ${depthText(event.p10Mm)} to ${depthText(event.p90Mm)} mm`]),
    `observed ${shareText(event.observedFraction)}`,
    ...(event.mayBeginEarlier ? ["may have begun before the window"] : []),
    ...(event.mayEndLater ? ["may go on after it"] : []),
    ...(event.unseenSteps > 0 ? [`${counted(event.unseenSteps, "step")} within it not seen`] : []),
    ...(event.atCap ? ["at cap: a lower bound"] : []),
    `rain before it: ${before.join(", ")}`,
  ];
}

/** Durations that cannot be told, with the reason, one line a reason. */
export function reasonsOf(peaks: readonly Peak[]): string[] {
  const reasons = new Map<string, string[]>();
  for (const { durationMinutes, reason, period } of peaks) {
    const ofPeriod = period?.reason ?? null;
    const why = reason ?? (ofPeriod === null ? null : `no return period: ${ofPeriod}`);
    if (why === null) continue;
    reasons.set(why, [...(reasons.get(why) ?? []), lengthText(durationMinutes * MINUTE_MS)]);
  }
  return [...reasons].map(([reason, lengths]) => `${lengths.join(", ")}: ${reason}`);
}

function volumeText(m3: number): string {
  return Number(m3.toPrecision(3)).toLocaleString("en-US");
}
