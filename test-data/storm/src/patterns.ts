import type { RandomStream } from "./random.ts";
import {
  type Cell,
  DEMO_DRIFT,
  type Drift,
  demoCells,
  type StormShape,
  type WeatherPattern,
} from "./weather.ts";

/**
 * Factors on the Nw of 8000 m-3 mm-1. Rain of the middle latitudes holds some 3,000 and the rain of tropical
 * seas some 30,000 (Bringi et al., 2003, J. Atmos. Sci. 60, 354-365; from memory). With the former,
 * Z = 200 R^1.6 is nearly right on the mean, and with the latter it is not.
 */
const MIDDLE_LATITUDE_DROPS = 0.4;
const TROPICAL_DROPS = 4;

const COMMON = {
  drift: DEMO_DRIFT,
  patchShift: 0,
  wetShare: 0.5,
  dropNumberFactor: MIDDLE_LATITUDE_DROPS,
};
const NO_CELLS = (): readonly Cell[] => [];

/** Widespread rain almost everywhere, and no shower. */
export const STEADY_RAIN: WeatherPattern = {
  ...COMMON,
  cells: NO_CELLS,
  widespreadMeanMm: 7,
  patchShift: 1.1,
  wetShare: 0.95,
};

/** Light widespread rain with dry patches, and no shower. */
export const LIGHT_RAIN: WeatherPattern = {
  ...COMMON,
  cells: NO_CELLS,
  widespreadMeanMm: 2.5,
  patchShift: 0.4,
  wetShare: 0.6,
};

/** Showers and widespread rain together, in which most gauges get some millimetres. */
export const MIXED_RAIN: WeatherPattern = {
  ...COMMON,
  cells: milderCells,
  widespreadMeanMm: 6,
  patchShift: 0.7,
  wetShare: 0.8,
};

/** The same, with hail in the two strongest showers. */
export const MIXED_RAIN_WITH_HAIL: WeatherPattern = {
  ...MIXED_RAIN,
  cells(random, shape) {
    const cells = milderCells(random, shape);
    const strongest = cells.toSorted((a, b) => b.peakMmPerHour - a.peakMmPerHour).slice(0, 2);
    return cells.map((cell) =>
      strongest.includes(cell) ? { ...cell, hailDbz: random.between(59, 63) } : cell,
    );
  },
};

/** Small storms with hail in their middles, in hardly any other rain. */
export const HAIL_STORMS: WeatherPattern = {
  ...COMMON,
  cells: hailCells,
  widespreadMeanMm: 1,
};

/** Showers that hardly move, of many small drops. */
export const WARM_RAIN: WeatherPattern = {
  ...COMMON,
  drift: { xKmPerMinute: 0.07, yKmPerMinute: 0.04 },
  cells: slowCells,
  widespreadMeanMm: 1.5,
  dropNumberFactor: TROPICAL_DROPS,
};

/** A line of strong cells that crosses a place of the map in the middle of the storm, rain on both its sides. */
export function lineAcross(place: { readonly xKm: number; readonly yKm: number }): WeatherPattern {
  return {
    ...COMMON,
    drift: LINE_DRIFT,
    cells: (random, shape) => lineCells(random, shape, place),
    widespreadMeanMm: 4,
    patchShift: 0.6,
    wetShare: 0.75,
  };
}

/** One shower of 1 km that stands still over one place, in light rain. */
export function cloudburstOver(place: { readonly xKm: number; readonly yKm: number }): WeatherPattern {
  return {
    ...LIGHT_RAIN,
    cells: (random, shape) => [
      {
        midMinute: shape.minutes * random.between(0.4, 0.6),
        lifeMinutes: 50,
        ...place,
        xKmPerMinute: 0,
        yKmPerMinute: 0,
        peakMmPerHour: random.between(90, 120),
        longSigmaKm: 1,
        shortSigmaKm: 1,
        axisRad: 0,
      },
    ],
  };
}

const LINE_DRIFT: Drift = { xKmPerMinute: 0.5, yKmPerMinute: 0.3 };

/** The demo's showers crowd in a small district: at two fifths of their strength they add up to a plausible storm. */
function milderCells(random: RandomStream, shape: StormShape): Cell[] {
  return demoCells(random, shape).map((cell) => ({ ...cell, peakMmPerHour: 0.4 * cell.peakMmPerHour }));
}

function lineCells(
  random: RandomStream,
  shape: StormShape,
  place: { readonly xKm: number; readonly yKm: number },
): Cell[] {
  const { minutes, districtHalfKm } = shape;
  const crossingMinute = minutes * random.between(0.4, 0.6);
  // Across the drift, give or take 15 degrees.
  const axisRad =
    Math.atan2(LINE_DRIFT.yKmPerMinute, LINE_DRIFT.xKmPerMinute) + Math.PI / 2 + random.between(-0.26, 0.26);
  const halfLengthKm = 1.7 * districtHalfKm;
  const spacingKm = 5;
  const cells: Cell[] = [];
  for (let along = -halfLengthKm; along <= halfLengthKm; along += spacingKm) {
    const alongKm = along + random.between(-1, 1);
    const acrossKm = random.between(-1, 1);
    cells.push({
      midMinute: crossingMinute + minutes * random.between(-0.08, 0.08),
      lifeMinutes: minutes * random.between(1.1, 1.5),
      xKm: place.xKm + alongKm * Math.cos(axisRad) - acrossKm * Math.sin(axisRad),
      yKm: place.yKm + alongKm * Math.sin(axisRad) + acrossKm * Math.cos(axisRad),
      xKmPerMinute: LINE_DRIFT.xKmPerMinute,
      yKmPerMinute: LINE_DRIFT.yKmPerMinute,
      peakMmPerHour: random.between(45, 100),
      longSigmaKm: random.between(3.5, 5),
      shortSigmaKm: random.between(2, 2.8),
      axisRad: axisRad + random.between(-0.2, 0.2),
    });
  }
  return cells;
}

function slowCells(random: RandomStream, shape: StormShape): Cell[] {
  const { minutes, districtHalfKm } = shape;
  const spread = 1.5 * districtHalfKm;
  const count = Math.round((10 * minutes * districtHalfKm) / (120 * 18));
  return Array.from({ length: count }, () => {
    const shortSigmaKm = random.between(1.8, 3);
    return {
      midMinute: random.between(0.1, 0.9) * minutes,
      lifeMinutes: random.between(60, 110),
      xKm: random.between(-1, 1) * spread,
      yKm: random.between(-1, 1) * spread,
      xKmPerMinute: 0.07 * random.between(0.7, 1.3),
      yKmPerMinute: 0.04 * random.between(0.7, 1.3),
      peakMmPerHour: random.between(35, 90),
      longSigmaKm: shortSigmaKm * random.between(1, 1.4),
      shortSigmaKm,
      axisRad: random.between(0, Math.PI),
    };
  });
}

function hailCells(random: RandomStream, shape: StormShape): Cell[] {
  const { minutes, districtHalfKm } = shape;
  const count = Math.round((4 * minutes) / 120);
  return Array.from({ length: count }, () => {
    const shortSigmaKm = random.between(2.6, 3.6);
    return {
      midMinute: random.between(0.25, 0.75) * minutes,
      lifeMinutes: random.between(70, 110),
      xKm: random.between(-1, 1) * districtHalfKm,
      yKm: random.between(-1, 1) * districtHalfKm,
      xKmPerMinute: DEMO_DRIFT.xKmPerMinute * random.between(0.6, 1),
      yKmPerMinute: DEMO_DRIFT.yKmPerMinute * random.between(0.6, 1),
      peakMmPerHour: random.between(40, 75),
      longSigmaKm: shortSigmaKm * random.between(1, 1.4),
      shortSigmaKm,
      axisRad: random.between(0, Math.PI),
      hailDbz: random.between(60, 66),
    };
  });
}
