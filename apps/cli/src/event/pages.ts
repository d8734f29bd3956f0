import { existsSync, lstatSync, mkdirSync, readdirSync } from "node:fs";
import path from "node:path";
import { arealReduction, inSeries } from "@rainreckon/accumulation";
import { InputError } from "@rainreckon/core";
import { displayText, writeText } from "@rainreckon/formats";
import {
  type EventIndexInput,
  type EventPageInput,
  type EventPeak,
  type EventRunWords,
  type FrequencyCurve,
  renderEventIndex,
  renderEventPage,
} from "@rainreckon/report";
import { depthText, lengthText, placeText } from "../ui/numbers.ts";
import { version } from "../version.ts";
import type { EventOutcome } from "./event.ts";
import { boundedText, eventDetails, reasonsOf, windowDetails } from "./event-words.ts";
import { areaText, type Frequency, yearsText } from "./frequency-told.ts";
import type { PlaceSeries } from "./place-series.ts";
import type { EventReport, Peak, PlaceReport } from "./schema.ts";

/** Durations that the index shows: of those that can be told, so many, spread evenly. */
const MOST_INDEX_DURATIONS = 4;
/** Return periods that are drawn. */
const MOST_CURVES = 6;

/**
 * Writes a page for each place of a report, and an index of them.
 *
 * @param folder - a new or empty one
 * @returns names of the files, the index first
 * @throws InputError (kind "usage") where the folder holds something
 */
export async function writePages(outcome: EventOutcome, folder: string): Promise<readonly string[]> {
  makeEmptyFolder(folder);
  const { report, series } = outcome;
  const files = fileNames(report.places);
  for (const [k, place] of report.places.entries())
    await writeText(
      path.join(folder, files[k] as string),
      eventPage(outcome, place, series[k] as PlaceSeries),
    );
  await writeText(path.join(folder, "index.html"), renderEventIndex(indexInput(report, files)));
  return ["index.html", ...files];
}

/** The page of one place. */
export function eventPage(
  { report, frequency }: EventOutcome,
  place: PlaceReport,
  series: PlaceSeries,
): string {
  const input: EventPageInput = {
    run: runWords(report),
    id: displayText(place.id),
    name: displayText(place.name),
    what: whatIs(place),
    headline: `${boundedText(place.window.depthMm, place.window.lowerBound)} mm`,
    headlineDetails: windowDetails(place),
    rain: {
      id: displayText(place.id),
      label: displayText(place.id),
      startEpochMs: series.best.startEpochMs,
      stepMs: series.best.stepMs,
      sides: sidesOf(series),
    },
    peaks: place.maxima.flatMap(peakOf),
    gaugePeaks: (place.gauge?.maxima ?? []).flatMap(peakOf),
    curves: frequency === undefined ? [] : curvesOf(frequency, place),
    events: place.events.map((event) => ({
      number: event.number,
      startEpochMs: Date.parse(event.start),
      endEpochMs: Date.parse(event.end),
      depth: `${boundedText(event.depthMm, event.lowerBound)} mm in ${lengthText(Date.parse(event.end) - Date.parse(event.start))}`,
      details: eventDetails(event),
      peaks: event.peaks.flatMap(peakOf),
    })),
    notes: [
      ...place.notes,
      ...(place.dropped.count === 0
        ? []
        : [`rain below the least depth of an event: ${depthText(place.dropped.depthMm)} mm in all`]),
    ],
    untold: reasonsOf(place.maxima),
  };
  return renderEventPage(input);
}

/** The figure first; beside it the gauge's own rain, or the radar's before adjustment. */
function sidesOf({ figure, best, radarMm, gauge }: PlaceSeries): EventPageInput["rain"]["sides"] {
  const { depthMm, observedFraction } = best;
  const first = { role: figure, depthMm, observedFraction };
  if (gauge !== undefined)
    return [
      first,
      {
        role: "gauge",
        depthMm: gauge.readings.depthMm,
        observedFraction: gauge.readings.observedFraction,
      },
    ];
  return figure === "radar" ? [first] : [first, { role: "radar", depthMm: radarMm, observedFraction }];
}

function runWords({ run, window, rule, durations, frequency, cautions }: EventReport): EventRunWords {
  const whose = frequency === null ? "" : [frequency.source, frequency.edition].filter(Boolean).join(", ");
  return {
    title: displayText(run.title),
    status: run.status === "final" ? "final" : "provisional",
    runDigest: run.runDigest,
    software: `rainreckon ${version()}`,
    zone: window.zone,
    window: { startEpochMs: Date.parse(window.start), endEpochMs: Date.parse(window.end) },
    rules: [`Events: ${rule.words}. Whose rule: ${displayText(rule.whose)}.`, durations.words],
    frequency:
      frequency === null
        ? []
        : [
            `Return periods by ${displayText(path.basename(frequency.file))}${whose === "" ? "" : ` (${displayText(whose)})`}: ${frequency.series}, ${frequency.kind}, ${frequency.leastMinutes} to ${frequency.mostMinutes} min, ${frequency.leastYears} to ${frequency.mostYears} years; SHA-256 ${frequency.sha256}.`,
            ...frequency.words.map((words) => displayText(words, 600)),
          ],
    cautions: cautions.map((caution) => displayText(caution, 600)),
  };
}

function whatIs(place: PlaceReport): string {
  const area = areaText(place.areaKm2);
  const where =
    place.latDeg === null || place.lonDeg === null ? "" : `, ${placeText(place.lonDeg, place.latDeg)}`;
  return `${place.kind}, ${place.kind === "catchment" ? `${area} km²` : `one cell of ${area} km²`}${where}`;
}

function peakOf(peak: Peak): EventPeak[] {
  const { depthMm, meanMmPerHour, start, period } = peak;
  if (depthMm === null || meanMmPerHour === null || start === null) return [];
  const between = (low: string | null | undefined, high: string | null | undefined) =>
    low === null || low === undefined || high === null || high === undefined
      ? ""
      : low === high
        ? low
        : `${low} to ${high}`;
  return [
    {
      durationMinutes: peak.durationMinutes,
      depthMm,
      p10Mm: peak.p10Mm ?? Number.NaN,
      p90Mm: peak.p90Mm ?? Number.NaN,
      meanMmPerHour,
      startEpochMs: Date.parse(start),
      observedFraction: peak.observedFraction,
      lowerBound: peak.lowerBound,
      atCap: peak.atCap,
      years: period === null || period.years === null ? "" : period.text,
      yearsBetween: between(period?.lowText, period?.highText),
      yearsOfTable: between(period?.tableLowText, period?.tableHighText),
    },
  ];
}

function curvesOf(
  { table, shownAs, arealReduction: reductions }: Frequency,
  place: PlaceReport,
): FrequencyCurve[] {
  const every = Math.ceil(table.periodsYears.length / MOST_CURVES);
  return table.periodsYears.flatMap((years, t): FrequencyCurve[] => {
    if (t % every !== 0 && t !== table.periodsYears.length - 1) return [];
    const points = table.durationsMin.flatMap((minutes, d) => {
      const factor =
        reductions === undefined || table.kind === "areal"
          ? 1
          : (arealReduction(reductions, minutes, place.areaKm2) ?? 1);
      return [{ minutes, mm: (table.depthMm[d]?.[t] ?? Number.NaN) * factor }];
    });
    const period = { years, is: "at" } as const;
    const shown = shownAs === "unknown" ? period : inSeries(period, table.series, shownAs);
    return [
      {
        years: Number(yearsText(shown.years)),
        durationMinutes: points.map(({ minutes }) => minutes),
        depthMm: points.map(({ mm }) => mm),
      },
    ];
  });
}

function indexInput(report: EventReport, files: readonly string[]): EventIndexInput {
  const told = report.durations.minutes.filter((minutes) =>
    report.places.some(({ maxima }) =>
      maxima.some((peak) => peak.durationMinutes === minutes && peak.depthMm !== null),
    ),
  );
  const every = Math.max(1, Math.ceil(told.length / MOST_INDEX_DURATIONS));
  const durationsMinutes = told.filter((_, k) => k % every === 0);
  const { areaDuration, exceedances } = report;
  const areasKm2 = [...new Set(areaDuration?.rows.map(({ areaKm2 }) => areaKm2) ?? [])];
  const areaDurations = [...new Set(areaDuration?.rows.map((row) => row.durationMinutes) ?? [])];
  return {
    run: runWords(report),
    durationsMinutes,
    rows: report.places.map((place, k) => ({
      id: displayText(place.id),
      name: displayText(place.name),
      file: files[k] as string,
      depth: boundedText(place.window.depthMm, place.window.lowerBound),
      events: place.events.length,
      peaks: durationsMinutes.map(
        (minutes) =>
          place.maxima.filter(({ durationMinutes }) => durationMinutes === minutes).flatMap(peakOf)[0],
      ),
    })),
    exceedances:
      exceedances === null
        ? undefined
        : {
            words: exceedances.words,
            rows: exceedances.rows.map(({ periodYears, expectedPerYear, seen }) => ({
              years: yearsText(periodYears),
              expected: yearsText(expectedPerYear),
              seen,
            })),
          },
    areaDuration:
      areaDuration === null || areaDuration.centre === null
        ? undefined
        : {
            words: [
              `Storm centre: ${depthText(areaDuration.centre.deepestMm)} mm in one cell of ${areaText(areaDuration.centre.cellKm2)} km² at ${placeText(areaDuration.centre.lonDeg, areaDuration.centre.latDeg)}.`,
              areaDuration.words,
            ],
            areasKm2,
            rows: areaDurations.map((durationMinutes) => ({
              durationMinutes,
              depthMm: areasKm2.map(
                (km2) =>
                  areaDuration.rows.find(
                    (row) => row.durationMinutes === durationMinutes && row.areaKm2 === km2,
                  )?.depthMm ?? Number.NaN,
              ),
            })),
          },
  };
}

/** Names that any file system takes, each once. */
function fileNames(places: readonly PlaceReport[]): string[] {
  const taken = new Set(["index.html"]);
  return places.map(({ kind, id }) => {
    const plain = `${kind}-${id}`.replaceAll(/[^A-Za-z0-9._-]+/g, "-").slice(0, 80);
    let name = `${plain}.html`;
    for (let n = 2; taken.has(name.toLowerCase()); n++) name = `${plain}-${n}.html`;
    taken.add(name.toLowerCase());
    return name;
  });
}

function makeEmptyFolder(folder: string): void {
  const refuse = (what: string) =>
    new InputError(what, folder, "choose another --out: a new or empty folder", { kind: "usage" });
  if (existsSync(folder)) {
    if (!lstatSync(folder).isDirectory()) throw refuse("the folder for the pages is no folder");
    if (readdirSync(folder).length > 0) throw refuse("the folder for the pages holds other files");
    return;
  }
  mkdirSync(folder, { recursive: true });
}
