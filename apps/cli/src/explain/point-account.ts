import { cellCentre, gaugeKey, type Interval } from "@rainreckon/core";
import { gaugeDepth } from "@rainreckon/verification";
import { cellRange } from "../total/uncertainty.ts";
import { isoUtc } from "../ui/numbers.ts";
import type { AdjustedBy } from "./adjusted-by.ts";
import type { CellAccount, MetScan } from "./cell-tracer.ts";
import { finite } from "./gate-account.ts";
import type { AskedPoint } from "./places-asked.ts";
import { isInside, type RemadeRun, spanText } from "./remade-run.ts";
import type { PartAccount, PointAccount } from "./schema.ts";
import { sureOf } from "./sure.ts";

/** The account of one cell: what a run told of it, cut to the span, with what DIR holds beside it. */
export function pointAccount(
  { name, lonDeg, latDeg, cell, gauge }: AskedPoint,
  met: CellAccount,
  remade: RemadeRun,
  adjustedBy: AdjustedBy,
): PointAccount {
  const { opened, span, comparison } = remade;
  const { run } = opened;
  const { grid } = run;
  const { xM, yM } = cellCentre(grid, cell);
  const [centreLonDeg, centreLatDeg] = run.map.inverse(xM, yM);
  const parts = met.parts.filter(({ step }) => isInside(step, span));
  const scans = scansOf(met.scans, parts, span);
  const number = new Map(scans.map((scan, k) => [scan, k + 1]));
  const ids = [...run.shape.radars.map(({ site }) => site.id), ...run.shape.grids.map(({ id }) => id)];
  let runningMm = 0;
  const rows = parts.map((part): PartAccount => {
    runningMm += part.depthMm;
    return {
      stepStart: isoUtc(part.step.startEpochMs),
      stepEnd: isoUtc(part.step.endEpochMs),
      ...spanText(part),
      source: ids[part.radar] ?? "",
      kind: part.kind,
      scan: number.get(part.scan) ?? 0,
      nextScan: number.get(part.nextScan) ?? 0,
      rateMmPerHour: part.scan.rateMmPerHour ?? 0,
      nextRateMmPerHour: part.nextScan.rateMmPerHour ?? 0,
      hours: part.hours0,
      nextHours: part.hours1,
      share: part.share,
      depthMm: part.depthMm,
      runningMm,
    };
  });
  const gaugeMm = (interval: Interval) =>
    gauge === undefined ? null : finite(gaugeDepth(gauge.series, interval).depthMm);
  const intervals = run.intervals.flatMap((interval, i) => {
    if (!isInside(interval, span)) return [];
    const own = parts.filter(({ step }) => isInside(step, interval));
    const flat = i * grid.nx * grid.ny + cell;
    return {
      ...spanText(interval),
      partsMm: own.reduce((sum, { depthMm }) => sum + depthMm, 0),
      radarMm: finite(remade.radarAt(i, cell)),
      storedMm: finite(remade.stored.get("radar_depth")?.[flat]),
      adjustedMm: finite(remade.adjustedAt(i, cell)),
      storedAdjustedMm: finite(remade.stored.get("adjusted_depth")?.[flat]),
      gaugeMm: gaugeMm(interval),
    };
  });
  const compared = comparison.gauges.find(
    (one) => gauge !== undefined && gaugeKey(one.gauge.series) === gaugeKey(gauge.series),
  );
  const radarTotalMm = remade.total.planes.totalMm[cell] as number;
  return {
    kind: gauge === undefined ? "point" : "gauge",
    name,
    latDeg,
    lonDeg,
    cell: {
      column: cell % grid.nx,
      row: Math.floor(cell / grid.nx),
      centreLatDeg,
      centreLonDeg,
      sizeM: grid.cellM,
    },
    gauge:
      compared === undefined
        ? null
        : {
            network: compared.gauge.series.network,
            gaugeId: compared.gauge.series.id,
            name: compared.gauge.station.name ?? null,
            verdict: compared.verdict.verdict,
            cause: compared.verdict.cause?.words ?? "",
            readingMinutes: finite((compared.gauge.series.stepMs ?? Number.NaN) / 60_000),
            gaugeMm: finite(compared.whole.gaugeMm),
            radarMm: finite(compared.whole.radarMm),
            cellCount: compared.gauge.cells.length,
          },
    scans: scans.map(({ epochMs: _, ...scan }, k) => ({ number: k + 1, ...scan })),
    parts: rows,
    steps: met.steps
      .filter((step) => isInside(step, span))
      .map((step) => ({
        ...spanText(step),
        radarMm: finite(step.depthMm),
        observedFraction: Math.min(1, step.observedMs / (step.endEpochMs - step.startEpochMs)),
        gaugeMm: gaugeMm(step),
      })),
    intervals,
    end: endOf(cell, met, intervals, remade),
    adjustment: adjustedBy.account(
      {
        cells: [cell],
        weights: [1],
        radarMm: run.intervals.map((_, i) => Float32Array.of(remade.radarAt(i, cell))),
      },
      radarTotalMm,
      remade.adjustedTotalMm?.[cell] ?? Number.NaN,
    ),
  };
}

/** Scans of the span in time order: those that parts are made of, and those that said nothing. */
function scansOf(met: readonly MetScan[], parts: CellAccount["parts"], span: Interval): MetScan[] {
  const used = new Set(parts.flatMap(({ scan, nextScan }) => [scan, nextScan]));
  return met.filter(
    (scan) => used.has(scan) || (scan.epochMs > span.startEpochMs && scan.epochMs <= span.endEpochMs),
  );
}

/** The account ends on the totals of the window, whatever part of it was asked for: all of it was made again. */
function endOf(
  cell: number,
  met: CellAccount,
  intervals: PointAccount["intervals"],
  remade: RemadeRun,
): PointAccount["end"] {
  const { span, opened, stored, total } = remade;
  const { run } = opened;
  const sumOf = (parts: readonly number[]) => parts.reduce((sum, mm) => sum + mm, 0);
  const inSpan = met.steps.filter((step) => isInside(step, span) && !Number.isNaN(step.depthMm));
  const byInterval = run.intervals.map((interval) =>
    Math.fround(
      sumOf(met.parts.filter(({ step }) => isInside(step, interval)).map(({ depthMm }) => depthMm)),
    ),
  );
  const figures = {
    radarMm: finite(total.planes.totalMm[cell]),
    storedRadarMm: finite(stored.get("radar_total")?.[cell]),
    adjustedMm: finite(remade.adjustedTotalMm?.[cell]),
    storedAdjustedMm: finite(stored.get("adjusted_total")?.[cell]),
  };
  return {
    what: "radar_total and adjusted_total of totals.nc, float32, over the window",
    ...figures,
    partsMm: met.parts.length === 0 ? null : Math.fround(sumOf(byInterval)),
    spanRadarMm: inSpan.length === 0 ? null : sumOf(inSpan.map(({ depthMm }) => depthMm)),
    sure: sureOf(
      remade.uncertainty.known
        ? cellRange(remade.uncertainty, cell, remade.uncertainty.totalMm[cell] ?? Number.NaN)
        : undefined,
    ),
    exact:
      figures.radarMm === figures.storedRadarMm &&
      figures.adjustedMm === figures.storedAdjustedMm &&
      intervals.every(
        (one) =>
          !stored.has("radar_depth") ||
          (one.radarMm === one.storedMm && one.adjustedMm === one.storedAdjustedMm),
      ),
  };
}
