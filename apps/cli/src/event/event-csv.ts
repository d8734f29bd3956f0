import { type CsvColumn, csvText } from "@rainreckon/formats";
import type { EventReport, Peak, PlaceReport } from "./schema.ts";

interface Row {
  readonly place: PlaceReport;
  /** 0 is the whole window. */
  readonly event: number;
  readonly source: "radar" | "gauge";
  readonly peak: Peak;
}

function* rowsOf({ places }: EventReport): Generator<Row> {
  for (const place of places) {
    for (const peak of place.maxima) yield { place, event: 0, source: "radar", peak };
    for (const event of place.events)
      for (const peak of event.peaks) yield { place, event: event.number, source: "radar", peak };
    for (const peak of place.gauge?.maxima ?? []) yield { place, event: 0, source: "gauge", peak };
  }
}

function text(name: string, of: (row: Row) => string | null | undefined): CsvColumn<Row> {
  return { kind: "text", name, of: (row) => of(row) ?? undefined };
}

function number(name: string, decimals: number, of: (row: Row) => number | null | undefined): CsvColumn<Row> {
  return { kind: "number", name, decimals, of: (row) => of(row) ?? Number.NaN };
}

/** Largest depths of all places, one a row: over the window (event 0), and over each event. */
export function eventCsv(report: EventReport): Promise<string> {
  return csvText(
    [
      text("place_kind", ({ place }) => place.kind),
      text("place_id", ({ place }) => place.id),
      text("name", ({ place }) => place.name),
      number("event", 0, ({ event }) => event),
      text("source", ({ source, place }) => (source === "gauge" ? "gauge" : place.figure)),
      number("duration_min", 0, ({ peak }) => peak.durationMinutes),
      number("area_km2", 6, ({ peak, source }) => (source === "gauge" ? 0 : peak.areaKm2)),
      text("start", ({ peak }) => peak.start),
      text("end", ({ peak }) => peak.end),
      number("depth_mm", 3, ({ peak }) => peak.depthMm),
      number("radar_mm", 3, ({ peak }) => peak.radarMm),
      number("p10_mm", 3, ({ peak }) => peak.p10Mm),
      number("p90_mm", 3, ({ peak }) => peak.p90Mm),
      number("mean_mm_per_hour", 2, ({ peak }) => peak.meanMmPerHour),
      number("observed_fraction", 4, ({ peak }) => peak.observedFraction),
      text("lower_bound", ({ peak }) => (peak.lowerBound ? "yes" : "no")),
      text("at_cap", ({ peak }) => (peak.atCap ? "yes" : "no")),
      // Text, so that no spreadsheet adds up what is a bound, or takes <2 for a number.
      text("return_period_years", ({ peak }) => peak.period?.text),
      text("return_period_p10", ({ peak }) => peak.period?.lowText),
      text("return_period_p90", ({ peak }) => peak.period?.highText),
      number("areal_reduction", 4, ({ peak }) => peak.period?.arealReduction),
      text("reason", ({ peak }) => peak.reason ?? peak.period?.reason),
    ],
    rowsOf(report),
  );
}
