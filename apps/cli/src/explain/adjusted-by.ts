import {
  fieldAdjuster,
  type LearnedMethod,
  learnMethod,
  meanRainShare,
  type WindowGauge,
} from "@rainreckon/adjustment";
import { cellCentre } from "@rainreckon/core";
import { type Adjustment, settingsOf } from "../total/adjust.ts";
import type { AssembledRun } from "../total/assemble.ts";
import type { PreparedRun } from "../total/prepare.ts";
import { finite } from "./gate-account.ts";
import type { AdjustmentAccount } from "./schema.ts";

type Applied = Extract<Adjustment, { applied: true }>;

/** So many gauges are asked one by one, the nearest first; each costs a learning of its own, twice. */
const GAUGES_ASKED = 40;

/** One figure: a cell, or the weighted mean of several. */
export interface AdjustedFigure {
  readonly cells: readonly number[];
  /** Shape [cells]; they sum to 1. */
  readonly weights: readonly number[];
  /** Shape [intervals][cells]: radar depth as it is stored. */
  readonly radarMm: readonly Float32Array[];
}

/**
 * What an adjusted figure owes to its adjustment: the method, and for each gauge how the figure would be without it
 * and how far it moves with it. Both are found by letting the method learn anew, so they hold for every method.
 */
export class AdjustedBy {
  readonly #run: PreparedRun;
  readonly #total: AssembledRun;
  readonly #adjustment: Adjustment;
  readonly #rangeKm: (cell: number) => number;
  readonly #others = new Map<number, readonly [without: LearnedMethod, more: LearnedMethod]>();

  /** @param rangeKm - from the radar that speaks loudest in a cell */
  constructor(
    run: PreparedRun,
    total: AssembledRun,
    adjustment: Adjustment,
    rangeKm: (cell: number) => number,
  ) {
    this.#run = run;
    this.#total = total;
    this.#adjustment = adjustment;
    this.#rangeKm = rangeKm;
  }

  account(figure: AdjustedFigure, radarMm: number, adjustedMm: number): AdjustmentAccount {
    const adjustment = this.#adjustment;
    if (!adjustment.applied) {
      const none = { method: null, title: null, factor: null, factorHere: null };
      return {
        applied: false,
        reason: adjustment.reason,
        ...none,
        gaugeCount: 0,
        notes: [],
        gauges: [],
        gaugesNotListed: 0,
      };
    }
    const gauges = adjustment.crossValidation.gauges.map(({ gauge }) => gauge);
    const radarSumMm = gauges.reduce((sum, gauge) => sum + gauge.radarMm, 0);
    const [xKm, yKm] = this.#middle(figure);
    const near = gauges
      .map((gauge, index) => ({ gauge, index, distanceKm: Math.hypot(gauge.xKm - xKm, gauge.yKm - yKm) }))
      .sort((a, b) => a.distanceKm - b.distanceKm || a.index - b.index)
      .slice(0, GAUGES_ASKED);
    const asked = near.map(({ gauge, index, distanceKm }) => {
      const [without, more] = this.#learnedAround(adjustment, gauges, index);
      return {
        network: gauge.network,
        gaugeId: gauge.gaugeId,
        distanceKm: finite(distanceKm),
        gaugeMm: gauge.gaugeMm,
        // What interpolates compares with the radar at the gauge's very point.
        radarMm: adjustment.learned.kind === "field" ? gauge.radarPointMm : gauge.radarMm,
        weight: adjustment.method === "mean-field-bias" && radarSumMm > 0 ? gauge.radarMm / radarSumMm : null,
        mmPerMm: finite(this.#figure(more, gauges, figure) - adjustedMm),
        withoutMm: finite(
          this.#figure(
            without,
            gauges.filter((_, k) => k !== index),
            figure,
          ),
        ),
      };
    });
    asked.sort((a, b) => Math.abs(b.mmPerMm ?? 0) - Math.abs(a.mmPerMm ?? 0));
    return {
      applied: true,
      reason: null,
      method: adjustment.method,
      title: adjustment.title,
      factor: finite(adjustment.factor),
      factorHere: finite(adjustedMm / radarMm),
      gaugeCount: adjustment.gaugeCount,
      notes: [...adjustment.notes],
      gauges: asked,
      gaugesNotListed: gauges.length - asked.length,
    };
  }

  #middle({ cells, weights }: AdjustedFigure): [number, number] {
    let [x, y] = [0, 0];
    for (const [k, cell] of cells.entries()) {
      const { xM, yM } = cellCentre(this.#run.grid, cell);
      x += (weights[k] as number) * (xM / 1000);
      y += (weights[k] as number) * (yM / 1000);
    }
    return [x, y];
  }

  /** The method without one gauge, and with 1 mm more in it. */
  #learnedAround(
    { method }: Applied,
    gauges: readonly WindowGauge[],
    index: number,
  ): readonly [LearnedMethod, LearnedMethod] {
    let known = this.#others.get(index);
    if (known === undefined) {
      const settings = settingsOf(this.#run, this.#total);
      known = [
        learnMethod(
          method,
          gauges.filter((_, k) => k !== index),
          settings,
        ),
        learnMethod(
          method,
          gauges.map((gauge, k) => (k === index ? withOneMore(gauge) : gauge)),
          settings,
        ),
      ];
      this.#others.set(index, known);
    }
    return known;
  }

  /** The figure under another learning of the method. */
  #figure(
    learned: LearnedMethod,
    gauges: readonly WindowGauge[],
    { cells, weights, radarMm }: AdjustedFigure,
  ): number {
    const { grid, intervals } = this.#run;
    const { cellM } = grid;
    const share = meanRainShare(gauges);
    let sum = Number.NaN;
    for (const [k, cell] of cells.entries()) {
      const { xM, yM } = cellCentre(grid, cell);
      // A grid of this cell alone: what it costs must not grow with the grid of the run.
      const adjuster = fieldAdjuster(learned, {
        grid: { ...grid, westM: xM - cellM / 2, northM: yM + cellM / 2, nx: 1, ny: 1 },
        totalMm: this.#total.planes.totalMm.subarray(cell, cell + 1),
        rangeKm: () => this.#rangeKm(cell),
        share,
      });
      for (const [i, interval] of intervals.entries()) {
        const [mm] = adjuster.interval(interval, Float32Array.of(radarMm[i]?.[k] ?? Number.NaN));
        if (mm === undefined || Number.isNaN(mm)) continue;
        sum = (Number.isNaN(sum) ? 0 : sum) + (weights[k] as number) * mm;
      }
    }
    return sum;
  }
}

/** A gauge that read 1 mm more, in proportion to its readings; a dry one in its first. */
function withOneMore(gauge: WindowGauge): WindowGauge {
  const { gaugeMm, readings } = gauge;
  return {
    ...gauge,
    gaugeMm: gaugeMm + 1,
    readings: readings.map((reading, k) => ({
      ...reading,
      gaugeMm: gaugeMm > 0 ? (reading.gaugeMm * (gaugeMm + 1)) / gaugeMm : k === 0 ? 1 : 0,
    })),
  };
}
