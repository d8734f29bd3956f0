import { displayText } from "@rainreckon/formats";
import { counted, depthText, lengthText, localText, placeText, utcText } from "../ui/numbers.ts";
import { textTable } from "../ui/table.ts";
import { areaText, yearsText } from "./frequency-told.ts";
import type { EventAccount, EventReport, Peak, PlaceReport } from "./schema.ts";

const WIDTH = 80;
const MINUTE_MS = 60_000;
/** Areas that the text shows of the depth–area–duration table. */
const MOST_AREA_COLUMNS = 6;

/** An account of events for people, 80 columns wide. */
export function eventText(report: EventReport): string {
  const { run, window, rule, durations, frequency, places } = report;
  const [start, end] = [Date.parse(window.start), Date.parse(window.end)];
  const lines = [
    displayText(run.title),
    ...spanLines(start, end, window.zone, "  "),
    ...wrapped(`Events: ${rule.words}. Whose rule: ${rule.whose}.`, "  "),
    ...wrapped(durations.words, "  "),
    ...(frequency === null ? [] : ["", ...frequencyLines(frequency)]),
    ...places.flatMap((place) => ["", ...placeLines(place, window.zone, frequency !== null)]),
    ...(report.exceedances === null ? [] : ["", ...exceedanceLines(report.exceedances)]),
    ...(report.areaDuration === null ? [] : ["", ...areaLines(report.areaDuration)]),
    "",
    ...report.cautions.flatMap((caution) => wrapped(caution, "! ", "  ")),
  ];
  return lines.join("\n");
}

function frequencyLines(frequency: NonNullable<EventReport["frequency"]>): string[] {
  const { file, series, shownAs, kind, source, edition, leastMinutes, mostMinutes, leastYears, mostYears } =
    frequency;
  const whose = [source, edition].filter((word) => word !== "").join(", ");
  return [
    ...wrapped(
      `Return periods by ${displayText(file)}${whose === "" ? "" : ` (${displayText(whose)})`}: ${series} ${kind}, ${leastMinutes} to ${mostMinutes} min, ${leastYears} to ${mostYears} years${shownAs === series ? "" : `; shown as ${shownAs}`}.`,
      "  ",
    ),
    ...frequency.words.flatMap((words) => wrapped(words, "  ")),
  ];
}

function placeLines(place: PlaceReport, zone: string, withPeriods: boolean): string[] {
  const { events, maxima } = place;
  const where = place.latDeg === null || place.lonDeg === null ? "" : placeText(place.lonDeg, place.latDeg);
  const area =
    place.kind === "catchment"
      ? `${areaText(place.areaKm2)} km2`
      : `one cell of ${areaText(place.areaKm2)} km2`;
  const title = [place.id, place.name]
    .filter((word) => word !== "" && word !== where)
    .map((word) => displayText(word));
  return [
    ...wrapped(
      `${title.join(" ")}${title.length === 0 ? "" : ": "}${place.kind}, ${area}${where === "" ? "" : `, ${where}`}`,
      "",
      "  ",
    ),
    ...wrapped(windowWords(place), "  "),
    ...place.notes.flatMap((note) => wrapped(note, "  note: ", "        ")),
    ...(events.length === 0
      ? wrapped(
          `no event${place.dropped.count === 0 ? "" : `; ${counted(place.dropped.count, "spell")} of rain below the least depth, ${depthText(place.dropped.depthMm)} mm in all`}`,
          "  ",
        )
      : []),
    ...events.flatMap((event) => [
      ...eventLines(event, zone),
      // The only event's largest depths are those of the window, which follow.
      ...(events.length > 1 ? indented(indented(peakTable(event.peaks, withPeriods)).join("\n")) : []),
    ]),
    ...(events.length > 0 && place.dropped.count > 0
      ? wrapped(
          `beside these ${counted(place.dropped.count, "spell")} of rain below the least depth, ${depthText(place.dropped.depthMm)} mm in all`,
          "  ",
        )
      : []),
    "",
    `  largest depths of the window, ${place.figure === "adjusted" ? "radar adjusted to gauges" : "radar alone"}, mean over ${areaText(place.areaKm2)} km2`,
    ...indented(peakTable(maxima, withPeriods)),
    ...(place.gauge === null
      ? []
      : [
          "",
          ...wrapped(
            `largest depths by the gauge itself, a point (verdict: ${displayText(place.gauge.verdict)}; ${depthText(place.gauge.depthMm)} mm, observed ${percent(place.gauge.observedFraction)})`,
            "  ",
          ),
          ...indented(peakTable(place.gauge.maxima, withPeriods)),
        ]),
    ...reasonLines(maxima),
  ];
}

function windowWords({ window, figure, kind }: PlaceReport): string {
  const words = [
    `${bounded(window.depthMm, window.lowerBound)} mm in the window, ${figure === "adjusted" ? "radar adjusted to gauges" : "radar alone"}`,
    `observed ${percent(window.observedFraction)}`,
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
  return words.join("; ");
}

function eventLines(event: EventAccount, zone: string): string[] {
  const [start, end] = [Date.parse(event.start), Date.parse(event.end)];
  const known = [
    ...(event.mayBeginEarlier ? ["may have begun before the window"] : []),
    ...(event.mayEndLater ? ["may go on after it"] : []),
    ...(event.unseenSteps > 0 ? [`${counted(event.unseenSteps, "step")} within it not seen`] : []),
    ...(event.atCap ? ["at cap"] : []),
  ];
  const before = event.antecedent.map(
    ({ hours, depthMm, lowerBound, observedFraction }) =>
      `${hours} h ${observedFraction === 0 ? "not known" : `${bounded(depthMm, lowerBound)} mm`}`,
  );
  const interval =
    event.p10Mm === null || event.p90Mm === null
      ? ""
      : ` (${depthText(event.p10Mm)} to ${depthText(event.p90Mm)})`;
  return [
    ...wrapped(
      `event ${event.number}: ${bounded(event.depthMm, event.lowerBound)} mm${interval} in ${lengthText(end - start)}, observed ${percent(event.observedFraction)}${known.length === 0 ? "" : `; ${known.join("; ")}`}`,
      "  ",
      "    ",
    ),
    ...spanLines(start, end, zone, "    "),
    ...wrapped(`rain before it: ${before.join(", ")}`, "    "),
  ];
}

function peakTable(peaks: readonly Peak[], withPeriods: boolean): string {
  const seen = peaks.filter(({ depthMm }) => depthMm !== null);
  if (seen.length === 0) return "none of these durations can be told";
  const withInterval = seen.some(({ p10Mm }) => p10Mm !== null);
  const withTable = seen.some(
    ({ period }) => period?.tableLowText !== null && period?.tableLowText !== undefined,
  );
  const right = { align: "right" } as const;
  return textTable(
    [
      { head: "in", ...right },
      { head: "mm", ...right },
      ...(withInterval ? [{ head: "p10-p90", ...right }] : []),
      { head: "mm/h", ...right },
      { head: "from, UTC" },
      ...(withPeriods ? [{ head: "years", ...right }] : []),
      ...(withPeriods && withInterval ? [{ head: "p10-p90", ...right }] : []),
      ...(withTable ? [{ head: "table's", ...right }] : []),
      { head: "" },
    ],
    seen.map((peak) => [
      lengthText(peak.durationMinutes * MINUTE_MS),
      bounded(peak.depthMm, peak.lowerBound),
      ...(withInterval ? [rangeText(depthOrNull(peak.p10Mm), depthOrNull(peak.p90Mm))] : []),
      rateText(peak.meanMmPerHour),
      (peak.start ?? "").slice(5, 16).replace("T", " "),
      ...(withPeriods ? [peak.period?.text ?? "–"] : []),
      ...(withPeriods && withInterval
        ? [rangeText(peak.period?.lowText ?? null, peak.period?.highText ?? null)]
        : []),
      ...(withTable
        ? [rangeText(peak.period?.tableLowText ?? null, peak.period?.tableHighText ?? null)]
        : []),
      [
        ...(peak.atCap ? ["at cap"] : []),
        ...(peak.observedFraction < 0.995 ? [`seen ${percent(peak.observedFraction)}`] : []),
      ].join(", "),
    ]),
  );
}

/** Durations that cannot be told, with the reason, one line a reason. */
function reasonLines(peaks: readonly Peak[]): string[] {
  const reasons = new Map<string, string[]>();
  for (const { durationMinutes, reason, period } of peaks) {
    const why =
      reason ?? (period?.reason === null || period === null ? null : `no return period: ${period.reason}`);
    if (why !== null)
      reasons.set(why, [...(reasons.get(why) ?? []), lengthText(durationMinutes * MINUTE_MS)]);
  }
  return [...reasons].flatMap(([reason, lengths]) => wrapped(`${lengths.join(", ")}: ${reason}`, "  "));
}

function exceedanceLines({ rows, words, placeCount }: NonNullable<EventReport["exceedances"]>): string[] {
  const right = { align: "right" } as const;
  return [
    ...wrapped(words, ""),
    ...indented(
      textTable(
        [
          { head: "years", ...right },
          { head: `expected of ${placeCount} in a year`, ...right },
          { head: "met here", ...right },
        ],
        rows.map(({ periodYears, expectedPerYear, seen }) => [
          yearsText(periodYears),
          yearsText(expectedPerYear),
          String(seen),
        ]),
      ),
    ),
  ];
}

function areaLines({
  rows,
  centre,
  words,
  figure,
  intervalMinutes,
}: NonNullable<EventReport["areaDuration"]>): string[] {
  if (rows.length === 0 || centre === null)
    return ["no rain on the grid, or no duration of whole grid intervals"];
  const areas = [...new Set(rows.map(({ areaKm2 }) => areaKm2))];
  const every = Math.max(1, Math.ceil(areas.length / MOST_AREA_COLUMNS));
  const shown = areas.filter((_, k) => k % every === 0 || k === areas.length - 1);
  const durations = [...new Set(rows.map(({ durationMinutes }) => durationMinutes))];
  return [
    ...wrapped(
      `Storm centre: ${depthText(centre.deepestMm)} mm in one cell of ${areaText(centre.cellKm2)} km2 at ${placeText(centre.lonDeg, centre.latDeg)} over the window; middle of all rain ${placeText(centre.rainMiddleLonDeg, centre.rainMiddleLatDeg)}.`,
      "",
    ),
    "",
    `Depth by area and duration, mm, ${figure === "adjusted" ? "radar adjusted to gauges" : "radar alone"}; intervals of ${lengthText(intervalMinutes * MINUTE_MS)}`,
    ...indented(
      textTable(
        [
          { head: "in", align: "right" },
          ...shown.map((km2) => ({ head: `${areaText(km2)} km2`, align: "right" as const })),
        ],
        durations.map((minutes) => [
          lengthText(minutes * MINUTE_MS),
          ...shown.map((km2) =>
            depthText(rows.find((row) => row.durationMinutes === minutes && row.areaKm2 === km2)?.depthMm),
          ),
        ]),
      ),
    ),
    ...wrapped(words, "  "),
  ];
}

/** A span on the local clock, and in UTC where that is another. */
function spanLines(start: number, end: number, zone: string, indent: string): string[] {
  const local = `${localText(start, zone)} to ${localText(end, zone)}`;
  const utc = `${utcText(start)} to ${utcText(end)}`;
  return /\+0 /.test(`${local} `) ? [`${indent}${utc}`] : [`${indent}${local}`, `${indent}${utc}`];
}

function bounded(mm: number | null, lowerBound: boolean): string {
  return mm === null ? "–" : `${lowerBound ? "≥ " : ""}${depthText(mm)}`;
}

function depthOrNull(mm: number | null): string | null {
  return mm === null ? null : depthText(mm);
}

function rangeText(low: string | null, high: string | null): string {
  return low === null || high === null ? "–" : low === high ? low : `${low} to ${high}`;
}

function rateText(mmPerHour: number | null): string {
  if (mmPerHour === null) return "–";
  return mmPerHour >= 10 ? mmPerHour.toFixed(0) : mmPerHour.toFixed(1);
}

function volumeText(m3: number): string {
  return Number(m3.toPrecision(3)).toLocaleString("en-US");
}

function percent(share: number): string {
  return share > 0.995 && share < 1 ? ">99 %" : `${Math.floor(100 * share)} %`;
}

function indented(text: string): string[] {
  return text.split("\n").map((line) => `  ${line}`);
}

/** Words broken into lines of at most 80 characters. */
export function wrapped(text: string, first: string, further = first): string[] {
  const lines: string[] = [];
  let line = first;
  let isEmpty = true;
  for (const word of displayText(text, 2000).split(" ")) {
    if (!isEmpty && line.length + 1 + word.length > WIDTH) {
      lines.push(line);
      line = further;
      isEmpty = true;
    }
    line += isEmpty ? word : ` ${word}`;
    isEmpty = false;
  }
  return [...lines, line];
}
