import { displayText } from "@rainreckon/formats";
import { counted, depthText, lengthText, localText, placeText, utcText } from "../ui/numbers.ts";
import { textTable } from "../ui/table.ts";
import { boundedText, eventDetails, reasonsOf, shareText, windowDetails } from "./event-words.ts";
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
    ...wrapped(
      `${boundedText(place.window.depthMm, place.window.lowerBound)} mm in the window, ${windowDetails(place).join("; ")}`,
      "  ",
    ),
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
            `largest depths by the gauge itself, a point (verdict: ${displayText(place.gauge.verdict)}; ${depthText(place.gauge.depthMm)} mm, observed ${shareText(place.gauge.observedFraction)})`,
            "  ",
          ),
          ...indented(peakTable(place.gauge.maxima, withPeriods)),
        ]),
    ...reasonsOf(maxima).flatMap((line) => wrapped(line, "  ")),
  ];
}

function eventLines(event: EventAccount, zone: string): string[] {
  const [start, end] = [Date.parse(event.start), Date.parse(event.end)];
  return [
    ...wrapped(
      `event ${event.number}: ${boundedText(event.depthMm, event.lowerBound)} mm in ${lengthText(end - start)}; ${eventDetails(event).join("; ")}`,
      "  ",
      "    ",
    ),
    ...spanLines(start, end, zone, "    "),
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
      boundedText(peak.depthMm, peak.lowerBound),
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
        ...(peak.observedFraction < 0.995 ? [`seen ${shareText(peak.observedFraction)}`] : []),
      ].join(", "),
    ]),
  );
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
