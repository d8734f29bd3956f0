import { cutWindow } from "@rainreckon/accumulation";
import type { GaugeSeries } from "@rainreckon/core";
import type { FieldSamples, GaugeEvidence, JudgeContext, RadarSight } from "../src/evidence.ts";
import { makePairs } from "../src/pairs.ts";
import { uniformStream } from "../src/random.ts";

const MINUTE = 60_000;
const START = Date.UTC(2031, 4, 3);
const STEP_MS = 5 * MINUTE;
const TIP_MM = 0.2;

/** A radar with nothing wrong at the place. */
export const CLEAR_SIGHT: RadarSight = {
  beamHeightAslM: 600,
  antennaAslM: 100,
  azimuthDeg: 45,
  blockedFraction: 0,
  blockageCorrectionDb: 0,
  attenuationCorrectionDb: 0,
  twoWayLossDb: 0.5,
  profileCorrectionDb: 0,
  meltingFraction: 0,
  snowFraction: 0,
  hailFraction: 0,
  convectiveFraction: 0.5,
  cappedFraction: 0,
  filledFraction: 0,
  screenedMm: 0,
  unseenMm: 0,
  observedFraction: 1,
  bridgedFraction: 0,
  edgeFraction: 0,
};

export interface InventedStorm {
  readonly seed: number;
  readonly hours: number;
  readonly gauges: number;
  readonly network?: (gauge: number) => string;
  /** Changes the tips that a gauge writes down, mm per five minutes; steps reach three hours beyond the window. */
  readonly spoil?: (gauge: number, readings: Float64Array) => void;
  /** Changes what the radar has over a gauge, mm per five minutes of the window. */
  readonly blind?: (gauge: number, radarMm: Float64Array) => void;
  readonly sight?: (gauge: number) => Partial<RadarSight>;
  /** Whether the radar is known at other places too. */
  readonly field?: boolean;
  /** From the true place of a gauge to the one in the stations file, km to the east. */
  readonly movedKm?: (gauge: number) => number;
}

/** Five-minute steps before and after the window that a gauge writes too. */
export const LEAD_STEPS = 36;

/**
 * Showers of four to eight kilometres that drift over a square of 60 km, seen by a radar that errs by a tenth, and gauges
 * that count tips of 0.2 mm.
 */
export function inventedStorm(storm: InventedStorm): {
  readonly gauges: GaugeEvidence[];
  readonly context: JudgeContext;
} {
  const uniform = uniformStream(storm.seed);
  const steps = storm.hours * 12;
  const window = { startEpochMs: START, endEpochMs: START + steps * STEP_MS };
  const showers = Array.from({ length: storm.hours * 25 }, () => ({
    xKm: 120 * uniform() - 30,
    yKm: 120 * uniform() - 30,
    sizeKm: 4 + 4 * uniform(),
    peak: 0.5 + 2 * uniform(),
    step: (steps + 2 * LEAD_STEPS) * uniform() - LEAD_STEPS,
    life: 6 + 6 * uniform(),
  }));
  const alive = Array.from({ length: steps + 2 * LEAD_STEPS }, (_, k) =>
    showers.filter(({ step, life }) => Math.abs(k - LEAD_STEPS - step) <= 3 * life),
  );
  /** Depth of a step at a place, mm. */
  const rain = (xKm: number, yKm: number, step: number) =>
    alive[step + LEAD_STEPS].reduce((sum, { xKm: x0, yKm: y0, sizeKm, peak, step: step0, life }) => {
      const age = step - step0;
      const off = ((xKm - x0 - 2 * age) ** 2 + (yKm - y0 - age) ** 2) / sizeKm ** 2 + (age / life) ** 2;
      return off > 9 ? sum : sum + peak * Math.exp(-off);
    }, 0);
  const gauges = Array.from({ length: storm.gauges }, (_, g): GaugeEvidence => {
    const [xKm, yKm] = [60 * uniform(), 60 * uniform()];
    const statedXKm = xKm + (storm.movedKm?.(g) ?? 0);
    let water = 0;
    const depthMm = Float64Array.from({ length: steps + 2 * LEAD_STEPS }, (_, k) => {
      water += rain(xKm, yKm, k - LEAD_STEPS);
      const tips = Math.floor(water / TIP_MM);
      water -= tips * TIP_MM;
      return tips * TIP_MM;
    });
    storm.spoil?.(g, depthMm);
    const startEpochMs = depthMm.map((_, k) => START + (k - LEAD_STEPS) * STEP_MS);
    const series: GaugeSeries = {
      network: storm.network?.(g) ?? "moor",
      id: `g${g}`,
      stepMs: STEP_MS,
      resolutionMm: TIP_MM,
      startEpochMs,
      endEpochMs: startEpochMs.map((ms) => ms + STEP_MS),
      depthMm,
      quality: new Uint8Array(depthMm.length),
    };
    const radarMm = Float64Array.from(
      { length: steps },
      (_, k) => rain(statedXKm, yKm, k) * (0.9 + 0.2 * uniform()),
    );
    storm.blind?.(g, radarMm);
    const radar = {
      startEpochMs: START,
      stepMs: STEP_MS,
      depthMm: radarMm,
      observedFraction: new Float64Array(steps).fill(1),
    };
    const { whole, byInterval } = makePairs({
      series,
      radar,
      intervals: cutWindow(window, 60 * MINUTE),
      minCommonFraction: 0.5,
      radarId: "sabird",
      rangeKm: 42,
      beamHeightAslM: 600,
    });
    const sight = { ...CLEAR_SIGHT, ...storm.sight?.(g) };
    return { series, whole, byInterval, xKm: statedXKm, yKm, radar, sight };
  });
  if (storm.field === false) return { gauges, context: { window } };
  const places = Array.from({ length: 30 * 30 }, (_, p) => [2 * (p % 30), 2 * Math.floor(p / 30)] as const);
  const field: FieldSamples = {
    startEpochMs: START,
    stepMs: STEP_MS,
    xKm: Float64Array.from(places, ([x]) => x),
    yKm: Float64Array.from(places, ([, y]) => y),
    depthMm: places.map(([x, y]) => Float32Array.from({ length: steps }, (_, k) => rain(x, y, k))),
  };
  return { gauges, context: { window, field } };
}
