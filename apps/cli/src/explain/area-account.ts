import { bestMm, catchmentFigures, type PlaceFigure } from "../total/figures.ts";
import { sourceIds } from "../total/job.ts";
import { areaRanges } from "../total/uncertainty.ts";
import { isoUtc } from "../ui/numbers.ts";
import type { AdjustedBy } from "./adjusted-by.ts";
import type { AreaTracer } from "./area-tracer.ts";
import { finite } from "./gate-account.ts";
import type { AskedArea } from "./places-asked.ts";
import { isInside, type RemadeRun, spanText } from "./remade-run.ts";
import type { AreaAccount } from "./schema.ts";
import { sureOf } from "./sure.ts";

/** Decimals of the depths in catchments.csv. */
const STORED_DECIMALS = 3;

/** The account of a catchment: what each scan showed over it, and its depth step by step, as catchments.csv has it. */
export function areaAccount(
  { catchment, index }: AskedArea,
  tracer: AreaTracer,
  remade: RemadeRun,
  adjustedBy: AdjustedBy,
): AreaAccount {
  const { opened, span, total, comparison, adjustedTotalMm } = remade;
  const { run, done } = opened;
  const ids = sourceIds(run.shape);
  const figures = [...catchmentFigures({ run, total, comparison, adjustedTotalMm })].filter(
    ({ place }) => place === run.catchments[index],
  );
  const rows = (done.catchments ?? []).filter((row) => row.catchment_id === catchment.id);
  const rowOf = ({ startEpochMs, endEpochMs }: PlaceFigure<unknown>) =>
    rows.find((row) => row.start === isoUtc(startEpochMs) && row.end === isoUtc(endEpochMs));
  const window = figures.find((figure) => figure.span === "window") as (typeof figures)[number];
  let runningMm = 0;
  const steps = figures
    .filter((figure) => figure.span === "step")
    .flatMap((step, k) => {
      if (!isInside(step, span)) return [];
      const { radarMm, adjustedMm, observedFraction } = step.figure;
      runningMm += finite(radarMm) ?? 0;
      return {
        ...spanText(step),
        radarMm: finite(radarMm),
        storedRadarMm: rowOf(step)?.radar_mm ?? null,
        observedFraction,
        adjustedMm: finite(adjustedMm),
        shares: Object.fromEntries(ids.map((id, r) => [id, tracer.steps[k]?.shares[r] ?? 0])),
        runningMm,
      };
    });
  const scans = tracer.scans
    .filter(({ epochMs }) => epochMs > span.startEpochMs && epochMs <= span.endEpochMs)
    .map(({ epochMs: _, ...scan }, k) => ({ number: k + 1, ...scan }));
  const { cells, fraction } = catchment.cells;
  const whole = fraction.reduce((sum, share) => sum + share, 0);
  const depthObservedMm = bestMm(window.figure);
  const storedDepth = rowOf(window)?.depth_observed_mm ?? null;
  return {
    id: catchment.id,
    name: catchment.name,
    areaKm2: catchment.areaKm2,
    cellCount: cells.length,
    scans,
    steps,
    end: {
      radarMm: finite(window.figure.radarMm),
      adjustedMm: finite(window.figure.adjustedMm),
      observedFraction: window.figure.observedFraction,
      spanRadarMm: runningMm,
      depthObservedMm: finite(depthObservedMm),
      storedDepthObservedMm: storedDepth,
      sure: sureOf(
        remade.uncertainty.known ? areaRanges(run, remade.uncertainty, catchment.cells).window : undefined,
      ),
      exact:
        asWritten(depthObservedMm) === storedDepth &&
        steps.every(
          ({ radarMm, storedRadarMm }) =>
            storedRadarMm === "" || asWritten(radarMm ?? Number.NaN) === storedRadarMm,
        ),
    },
    adjustment: adjustedBy.account(
      {
        cells: [...cells],
        weights: Array.from(fraction, (share) => share / whole),
        radarMm: run.intervals.map((_, i) => Float32Array.from(cells, (cell) => remade.radarAt(i, cell))),
      },
      window.figure.radarMm,
      window.figure.adjustedMm,
    ),
  };
}

function asWritten(mm: number): string {
  return Number.isFinite(mm) ? mm.toFixed(STORED_DECIMALS) : "";
}
