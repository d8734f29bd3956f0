import { geodesicInverse } from "@rainreckon/mosaic";
import type {
  GaugeEvidence,
  GaugePairs,
  JudgeContext,
  RadarContext,
  RadarSight,
} from "@rainreckon/verification";
import { loudestRadar } from "./adjust.ts";
import type { AssembledRun } from "./assemble.ts";
import { companionIndex } from "./companions.ts";
import { screenedDepthMm } from "./echo-account.ts";
import { fieldSamples } from "./field-places.ts";
import type { GaugeInput } from "./gauges.ts";
import type { PreparedRun } from "./prepare.ts";

/** What a run knows of each gauge, as plain data that `judgeGauges` takes; in the order of the run's gauges. */
export function gaugeEvidence(
  run: PreparedRun,
  total: AssembledRun,
  pairs: readonly Pick<GaugePairs, "whole" | "byInterval">[],
): GaugeEvidence[] {
  const screenedMm = screenedDepthMm(total);
  const { overrides } = run.loaded.plan;
  return run.gauges.gauges.map((gauge, g) => {
    const { series, station } = gauge;
    const override = overrides.find((one) => one.network === series.network && one.gauge === series.id);
    return {
      series,
      whole: pairs[g].whole,
      byInterval: pairs[g].byInterval,
      xKm: gauge.xM / 1000,
      yKm: gauge.yM / 1000,
      radar: {
        startEpochMs: run.window.startEpochMs,
        stepMs: run.stepMs,
        depthMm: total.gauges.depthMm[g],
        observedFraction: total.gauges.observedFraction[g],
      },
      sight: radarSight(run, total, gauge, screenedMm),
      ...(gauge.rowFaults === undefined ? {} : { rowFaults: gauge.rowFaults }),
      ...(station.heated === undefined ? {} : { heated: station.heated }),
      ...(override === undefined ? {} : { override }),
    };
  });
}

/** What all gauges of a run are judged with. */
export function judgeContext(
  { window, grid, shape, stepMs }: PreparedRun,
  { fieldMm }: AssembledRun,
): JudgeContext {
  const field = fieldSamples(grid, shape.fieldCells, fieldMm, window.startEpochMs, stepMs);
  return { window, ...(field === undefined ? {} : { field }) };
}

/** What the radars of a run are judged by beside its gauges. */
export function radarContext({ shape, overlaps, loaded }: PreparedRun): RadarContext {
  return {
    radarIds: shape.radars.map(({ site }) => site.id),
    rangeBandsKm: loaded.plan.pairs.rangeBandsKm,
    overlaps,
  };
}

function radarSight(
  run: PreparedRun,
  total: AssembledRun,
  { cell, station }: GaugeInput,
  screenedMm: Float32Array,
): RadarSight {
  const { planes, unseenMm } = total;
  const companion = (name: string) => planes.companions[companionIndex(name)]?.[cell] ?? Number.NaN;
  const site = run.shape.radars[loudestRadar(total, cell)]?.site;
  return {
    beamHeightAslM: planes.beamHeightAslM[cell],
    antennaAslM: site?.antennaHeightM ?? Number.NaN,
    azimuthDeg: site === undefined ? Number.NaN : geodesicInverse(site, station).azimuthDeg,
    blockedFraction: companion("blocked_fraction"),
    blockageCorrectionDb: companion("blockage_correction"),
    attenuationCorrectionDb: companion("attenuation_correction"),
    twoWayLossDb: companion("two_way_loss"),
    profileCorrectionDb: companion("profile_correction"),
    meltingFraction: companion("melting_fraction"),
    snowFraction: companion("snow_fraction"),
    hailFraction: companion("hail_fraction"),
    convectiveFraction: companion("convective_fraction"),
    cappedFraction: planes.cappedFraction[cell],
    filledFraction: companion("filled_fraction"),
    screenedMm: screenedMm[cell],
    unseenMm: unseenMm[cell],
    observedFraction: planes.observedFraction[cell],
    bridgedFraction: planes.bridgedFraction[cell],
    edgeFraction: planes.edgeFraction[cell],
  };
}
