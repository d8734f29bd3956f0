import { writeText } from "@rainreckon/formats";
import { type CheckBias, checkPage } from "@rainreckon/report";
import { STANDING_CAUTIONS } from "../total/cautions.ts";
import { localText, utcText } from "../ui/numbers.ts";
import type { CheckDocument, CheckedRadar } from "./schema.ts";
import { radarCauseWords } from "./trust.ts";

/** Writes a check as one offline page. */
export async function writeCheckPage(file: string, check: CheckDocument): Promise<void> {
  const { start, end, zone } = check.window;
  const local =
    zone === "UTC" ? "" : ` (${localText(Date.parse(start), zone)} to ${localText(Date.parse(end), zone)})`;
  const gap = (value: number | null) => value ?? Number.NaN;
  await writeText(
    file,
    checkPage({
      title: check.title,
      window: `${utcText(Date.parse(start))} to ${utcText(Date.parse(end))}${local}; ${check.status}`,
      trust: check.trust,
      cautions: STANDING_CAUTIONS,
      gauges: check.gauges.map((gauge) => ({
        gauge: `${gauge.network} ${gauge.gaugeId}`,
        name: gauge.name,
        gaugeMm: gap(gauge.gaugeMm),
        radarMm: gap(gauge.radarMm),
        verdict: gauge.verdict,
        cause: gauge.cause?.words ?? "",
        evidence: gauge.evidence,
        override:
          gauge.override === null
            ? ""
            : `${gauge.override.verdict}, ${gauge.override.reason} (${gauge.override.by}, ${gauge.override.date})`,
        findings: gauge.findings.map(({ check: name, sentence }) => ({ check: name, sentence })),
      })),
      radars: check.radars.map((radar) => ({
        radar: radar.radarId,
        verdict: radar.verdict,
        cause: radarCauseWords(radar.cause),
        sentence: radar.sentence,
        groups: groupsOf(radar),
      })),
    }),
  );
}

function groupsOf(radar: CheckedRadar): CheckBias[] {
  const gap = (value: number | null) => value ?? Number.NaN;
  return [
    { ...radar.whole, label: "all together" },
    ...radar.byRange,
    ...radar.bySector,
    ...radar.overTime,
  ].map(({ label, gauges, ratio, low, high }) => ({
    label,
    gauges,
    ratio: gap(ratio),
    low: gap(low),
    high: gap(high),
  }));
}
