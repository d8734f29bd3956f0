import {
  differentialReflectivityDb,
  lnRateCoefficient,
  lnReflectivityCoefficient,
  phaseTimesWavelength,
  RATE_EXPONENT,
  waterGramPerM3,
} from "./drops.ts";
import type { RandomStream } from "./random.ts";
import { TEXTURE_SIDE, textureAt, textureRow, wrappedTexture } from "./texture.ts";

/** One shower: it grows, moves, and decays; its rain falls off like a stretched Gaussian. */
export interface Cell {
  readonly midMinute: number;
  readonly lifeMinutes: number;
  /** Where it is at `midMinute`, and how it moves, km and km per minute. */
  readonly xKm: number;
  readonly yKm: number;
  readonly xKmPerMinute: number;
  readonly yKmPerMinute: number;
  readonly peakMmPerHour: number;
  readonly longSigmaKm: number;
  readonly shortSigmaKm: number;
  /** Direction of the long axis, radians from east towards north. */
  readonly axisRad: number;
  /** Echo that hail adds at the cell's middle and height of life, dBZ; absent where there is no hail. */
  readonly hailDbz?: number;
}

/** How the storm as a whole moves, km per minute. */
export interface Drift {
  readonly xKmPerMinute: number;
  readonly yKmPerMinute: number;
}

/** Weather of another kind than the demo's. Its showers rain as they are given, unscaled. */
export interface WeatherPattern {
  readonly cells: (random: RandomStream, shape: StormShape) => readonly Cell[];
  readonly drift: Drift;
  /** Depth of the widespread rain over the district; 0 for none. */
  readonly widespreadMeanMm: number;
  /** Added to the pattern of the widespread rain, in its deviations: the more, the fewer dry patches. */
  readonly patchShift: number;
  /** Share of the district that is to lie under widespread rain. */
  readonly wetShare: number;
  /** Factor on the number of drops, for the same rain: above 1 means more and smaller drops. */
  readonly dropNumberFactor: number;
}

/** What the storm is to be like. Lengths are half sides of squares around the middle of the district. */
export interface StormShape {
  readonly minutes: number;
  readonly districtHalfKm: number;
  readonly surroundingsHalfKm: number;
  /** Depth over the district and at its wettest place that the showers and the widespread rain are scaled to. */
  readonly meanMm: number;
  readonly maximumMm: number;
  /** Absent for weather like the demo's; where it is given, `meanMm` and `maximumMm` are not used. */
  readonly pattern?: WeatherPattern | undefined;
}

/** A square lattice of points 1 km apart, row 0 in the south. */
export interface Lattice {
  readonly westKm: number;
  readonly southKm: number;
  readonly nx: number;
  readonly ny: number;
}

/** The air at ground level at one moment, on a lattice: shape [ny, nx], row 0 in the south. */
export interface Moment {
  readonly minute: number;
  readonly drift: Drift;
  readonly rateMmPerHour: Float32Array;
  /** Share of the rain that falls from showers, 0 to 1. */
  readonly showerShare: Float32Array;
  readonly zMm6PerM3: Float32Array;
  /** Share of the reflectivity that is hail's, 0 to 1. */
  readonly hailShare: Float32Array;
  /** One-way KDP times wavelength, deg/km times m. */
  readonly phaseTimesWavelength: Float32Array;
  readonly zdrDb: Float32Array;
}

const FADE_KM = 100;
/** Hail falls in the middle of a shower only: its width is half of the rain's. */
const HAIL_TO_RAIN_WIDTH = 0.5;
const SHOWER_EDGE = 0.02;
const DRY_DISTANCE2 = -2 * Math.log(SHOWER_EDGE);

const MU_STEPS_PER_UNIT = 10;
const MU_HIGHEST = 6;
const LN_RATE = Float64Array.from({ length: MU_HIGHEST * MU_STEPS_PER_UNIT + 1 }, (_, i) =>
  lnRateCoefficient(i / MU_STEPS_PER_UNIT),
);
const LN_Z = Float64Array.from(LN_RATE, (_, i) => lnReflectivityCoefficient(i / MU_STEPS_PER_UNIT));

/** Wind that carries the demo's storm, towards the east-north-east: 11.5 m/s. */
export const DEMO_DRIFT: Drift = { xKmPerMinute: 0.565, yKmPerMinute: 0.396 };

/**
 * An invented storm: widespread rain with dry patches, and showers that grow and decay along a band
 * south-east of the district's middle. Everything is a function of place and time; lattices are views of it.
 */
export class Weather {
  /** How the storm as a whole moves. */
  readonly drift: Drift;
  /** Every shower of the storm, hail and all. */
  readonly cells: readonly Cell[];
  readonly #shape: StormShape;
  readonly #patches: Float32Array;
  #patchOrigin: { readonly xKm: number; readonly yKm: number } = { xKm: 0, yKm: 0 };
  readonly #dropNumber: Float32Array;
  readonly #dropShape: Float32Array;
  readonly #patchShift: number;
  readonly #lnDropFactor: number;
  readonly #showerFactor: number;
  readonly #widespreadFactor: number;

  constructor(random: RandomStream, shape: StormShape) {
    this.#shape = shape;
    this.drift = shape.pattern?.drift ?? DEMO_DRIFT;
    this.#patchShift = shape.pattern?.patchShift ?? 0;
    this.#lnDropFactor = Math.log(shape.pattern?.dropNumberFactor ?? 1);
    this.#patches = wrappedTexture(random, [64, 32, 16, 8], 0.7);
    this.#dropNumber = wrappedTexture(random, [64, 32, 16], 0.6);
    this.#dropShape = wrappedTexture(random, [64, 32], 0.6);
    this.cells = (shape.pattern?.cells ?? demoCells)(random, shape);
    this.#patchOrigin = this.#choosePatchOrigin(random);
    const factors = this.#fitFactors();
    this.#showerFactor = factors.shower;
    this.#widespreadFactor = factors.widespread;
  }

  /** Rain rate at the ground, mm/h, at a point and minute. */
  rateAt(xKm: number, yKm: number, minute: number): number {
    let showers = 0;
    for (const cell of this.cells) {
      const rate = peakNow(cell, minute);
      if (rate > 0) showers += rate * showerFall(stretchedDistance2(cell, xKm, yKm, minute));
    }
    return (
      this.#showerFactor * showers +
      this.#widespreadFactor * this.#swell(minute) * fade(xKm, yKm) * patchRate(this.#patch(xKm, yKm, minute))
    );
  }

  /** Fills a lattice with the rain of one minute, and with its drops where `withDrops` asks for them. */
  fill(lattice: Lattice, moment: Moment, withDrops: boolean): Moment {
    const minute = moment.minute;
    this.#addShowers(lattice, minute, moment.rateMmPerHour);
    this.#addWidespread(lattice, minute, moment);
    if (withDrops) {
      this.#fillDrops(lattice, moment);
      this.#addHail(lattice, moment);
    }
    return moment;
  }

  #patch(xKm: number, yKm: number, minute: number): number {
    const pattern = textureAt(
      this.#patches,
      this.#patchOrigin.xKm + xKm - this.drift.xKmPerMinute * minute,
      this.#patchOrigin.yKm + yKm - this.drift.yKmPerMinute * minute,
    );
    return pattern + this.#patchShift;
  }

  /** Of a hundred places of the pattern, the one whose wet share over the district comes nearest to what is asked. */
  #choosePatchOrigin(random: RandomStream): { xKm: number; yKm: number } {
    const { districtHalfKm, minutes } = this.#shape;
    const wetShare = this.#shape.pattern?.wetShare ?? 0.5;
    const places = Array.from({ length: 100 }, () => ({
      xKm: random.between(0, TEXTURE_SIDE),
      yKm: random.between(0, TEXTURE_SIDE),
    }));
    const distance = places.map((place) => {
      this.#patchOrigin = place;
      let wet = 0;
      for (let i = 0; i < 192; i++) {
        const xKm = districtHalfKm * (((i % 8) - 3.5) / 4);
        const yKm = districtHalfKm * (((Math.floor(i / 8) % 8) - 3.5) / 4);
        const minute = minutes * (0.25 + 0.25 * Math.floor(i / 64));
        if (patchRate(this.#patch(xKm, yKm, minute)) > 0) wet += 1;
      }
      return Math.abs(wet / 192 - wetShare);
    });
    return places[distance.indexOf(Math.min(...distance))]!;
  }

  /** The widespread rain sets in, holds, and dies away. */
  #swell(minute: number): number {
    const share = Math.min(1, Math.max(0, minute / this.#shape.minutes));
    return 0.35 + 0.65 * Math.sin(Math.PI * share) ** 2;
  }

  #addShowers(lattice: Lattice, minute: number, into: Float32Array): void {
    into.fill(0);
    for (const cell of this.cells) {
      const rate = this.#showerFactor * peakNow(cell, minute);
      if (rate <= 0) continue;
      const { firstColumn, lastColumn, firstRow, lastRow } = reachOf(cell, minute, lattice);
      for (let row = firstRow; row <= lastRow; row++) {
        for (let column = firstColumn; column <= lastColumn; column++) {
          const d2 = stretchedDistance2(cell, lattice.westKm + column, lattice.southKm + row, minute);
          if (d2 < DRY_DISTANCE2) into[row * lattice.nx + column]! += rate * showerFall(d2);
        }
      }
    }
  }

  #addWidespread(lattice: Lattice, minute: number, moment: Moment): void {
    const factor = this.#widespreadFactor * this.#swell(minute);
    const line = new Float32Array(lattice.nx);
    for (let row = 0; row < lattice.ny; row++) {
      textureRow(
        this.#patches,
        this.#patchOrigin.xKm + lattice.westKm - this.drift.xKmPerMinute * minute,
        this.#patchOrigin.yKm + lattice.southKm + row - this.drift.yKmPerMinute * minute,
        line,
      );
      for (let column = 0; column < lattice.nx; column++) {
        const index = row * lattice.nx + column;
        const showers = moment.rateMmPerHour[index]!;
        const spread = patchRate(line[column]! + this.#patchShift);
        const rate =
          spread > 0
            ? showers + factor * fade(lattice.westKm + column, lattice.southKm + row) * spread
            : showers;
        moment.rateMmPerHour[index] = rate;
        moment.showerShare[index] = rate > 0 ? showers / rate : 0;
      }
    }
  }

  #fillDrops(lattice: Lattice, moment: Moment): void {
    const number = new Float32Array(lattice.nx);
    const shape = new Float32Array(lattice.nx);
    for (let row = 0; row < lattice.ny; row++) {
      const yKm = lattice.southKm + row;
      // Drops change more slowly than the rain moves: their patterns drift at their own speeds.
      textureRow(
        this.#dropNumber,
        lattice.westKm - 0.7 * this.drift.xKmPerMinute * moment.minute,
        yKm - 0.7 * this.drift.yKmPerMinute * moment.minute,
        number,
      );
      textureRow(this.#dropShape, lattice.westKm - 0.4 * moment.minute, yKm, shape);
      for (let column = 0; column < lattice.nx; column++) {
        const index = row * lattice.nx + column;
        fillDropsOfCell(moment, index, number[column]!, shape[column]!, this.#lnDropFactor);
      }
    }
  }

  /** Hail echoes and adds nothing to the rain; the truth counts rain alone. */
  #addHail(lattice: Lattice, moment: Moment): void {
    moment.hailShare.fill(0);
    for (const cell of this.cells) {
      const vigour = vigourNow(cell, moment.minute);
      if (cell.hailDbz === undefined || vigour === 0) continue;
      const peakZ = vigour * 10 ** (cell.hailDbz / 10);
      const { firstColumn, lastColumn, firstRow, lastRow } = reachOf(cell, moment.minute, lattice);
      for (let row = firstRow; row <= lastRow; row++) {
        for (let column = firstColumn; column <= lastColumn; column++) {
          const index = row * lattice.nx + column;
          const xKm = lattice.westKm + column;
          const d2 = stretchedDistance2(cell, xKm, lattice.southKm + row, moment.minute);
          const hailZ = peakZ * showerFall(d2 / HAIL_TO_RAIN_WIDTH ** 2);
          if (hailZ === 0) continue;
          const otherZ = moment.zMm6PerM3[index]! * (1 - moment.hailShare[index]!);
          moment.zMm6PerM3[index]! += hailZ;
          moment.hailShare[index] = 1 - otherZ / moment.zMm6PerM3[index]!;
        }
      }
    }
  }

  /** Scales showers and widespread rain so that the district's mean and maximum depth come out as asked. */
  #fitFactors(): { shower: number; widespread: number } {
    const { districtHalfKm, minutes, meanMm, maximumMm, pattern } = this.#shape;
    const spacingKm = districtHalfKm / 16;
    const stepMinutes = 2;
    const shower: number[] = [];
    const widespread: number[] = [];
    for (let y = -districtHalfKm; y <= districtHalfKm; y += spacingKm) {
      for (let x = -districtHalfKm; x <= districtHalfKm; x += spacingKm) {
        let showerMm = 0;
        let widespreadMm = 0;
        for (let minute = stepMinutes / 2; minute < minutes; minute += stepMinutes) {
          for (const cell of this.cells) {
            const peak = peakNow(cell, minute);
            if (peak > 0) {
              showerMm += (stepMinutes / 60) * peak * showerFall(stretchedDistance2(cell, x, y, minute));
            }
          }
          widespreadMm +=
            (stepMinutes / 60) * this.#swell(minute) * fade(x, y) * patchRate(this.#patch(x, y, minute));
        }
        shower.push(showerMm);
        widespread.push(widespreadMm);
      }
    }
    const mean = (values: readonly number[]): number => values.reduce((a, b) => a + b, 0) / values.length;
    const meanShower = mean(shower);
    const meanWidespread = mean(widespread);
    if (pattern !== undefined) {
      return { shower: 1, widespread: meanWidespread > 0 ? pattern.widespreadMeanMm / meanWidespread : 0 };
    }
    const widespreadFor = (factor: number): number =>
      Math.max(0.25 * meanMm, meanMm - factor * meanShower) / meanWidespread;
    let low = 0;
    let high = maximumMm / Math.max(...shower);
    for (let round = 0; round < 40; round++) {
      const middle = (low + high) / 2;
      const other = widespreadFor(middle);
      const maximum = Math.max(...shower.map((value, i) => middle * value + other * widespread[i]!));
      if (maximum > maximumMm) high = middle;
      else low = middle;
    }
    return { shower: low, widespread: widespreadFor(low) };
  }
}

/** An empty moment for a lattice. */
export function emptyMoment(lattice: Lattice, minute: number, drift: Drift = DEMO_DRIFT): Moment {
  const cells = lattice.nx * lattice.ny;
  return {
    minute,
    drift,
    hailShare: new Float32Array(cells),
    rateMmPerHour: new Float32Array(cells),
    showerShare: new Float32Array(cells),
    zMm6PerM3: new Float32Array(cells),
    phaseTimesWavelength: new Float32Array(cells),
    zdrDb: new Float32Array(cells),
  };
}

/** From rain rate and the local drop population to what a radar would see of it. */
function fillDropsOfCell(
  moment: Moment,
  index: number,
  numberTexture: number,
  shapeTexture: number,
  lnDropFactor: number,
): void {
  const rate = moment.rateMmPerHour[index]!;
  if (rate < 0.03) {
    moment.zMm6PerM3[index] = 0;
    moment.phaseTimesWavelength[index] = 0;
    moment.zdrDb[index] = 0;
    return;
  }
  // Nw around the 8000 m-3 mm-1 of Marshall and Palmer (1948), within a factor of about 2.5 either way.
  const lnNw = Math.log(8000) + 0.8 * Math.max(-2.2, Math.min(2.2, numberTexture)) + lnDropFactor;
  const mu = Math.max(0, Math.min(MU_HIGHEST, 2 + 1.5 * shapeTexture));
  const muStep = Math.round(mu * MU_STEPS_PER_UNIT);
  const lnDm = Math.min(Math.log(4), (Math.log(rate) - LN_RATE[muStep]! - lnNw) / RATE_EXPONENT);
  const dmMm = Math.exp(lnDm);
  moment.zMm6PerM3[index] = Math.exp(LN_Z[muStep]! + lnNw + 7 * lnDm);
  moment.phaseTimesWavelength[index] = phaseTimesWavelength(waterGramPerM3(Math.exp(lnNw), dmMm), dmMm);
  moment.zdrDb[index] = differentialReflectivityDb(lnDm);
}

/** Widespread rain from its pattern: more than half of the area is dry, and edges are sharp. Not yet scaled. */
function patchRate(patch: number): number {
  return patch > 0.3 ? Math.exp(0.8 * (patch - 0.2)) - 1 : 0;
}

/** The widespread rain is some 200 km across: it fades away from the district. */
function fade(xKm: number, yKm: number): number {
  const ratio2 = (xKm * xKm + yKm * yKm) / (FADE_KM * FADE_KM);
  const ratio4 = ratio2 * ratio2;
  return 1 / (1 + ratio4 * ratio4);
}

/** How a shower's rain falls off from its middle: Gaussian, but dry from 2.8 sigma on. */
function showerFall(distance2: number): number {
  return distance2 < DRY_DISTANCE2 ? (Math.exp(-0.5 * distance2) - SHOWER_EDGE) / (1 - SHOWER_EDGE) : 0;
}

function placeOf(cell: Cell, minute: number): { xKm: number; yKm: number } {
  const since = minute - cell.midMinute;
  return { xKm: cell.xKm + cell.xKmPerMinute * since, yKm: cell.yKm + cell.yKmPerMinute * since };
}

/** The part of a lattice that a shower can reach: first and last columns and rows. */
function reachOf(cell: Cell, minute: number, lattice: Lattice) {
  const { xKm, yKm } = placeOf(cell, minute);
  const reach = Math.sqrt(DRY_DISTANCE2) * cell.longSigmaKm;
  return {
    firstColumn: Math.max(0, Math.ceil(xKm - reach - lattice.westKm)),
    lastColumn: Math.min(lattice.nx - 1, Math.floor(xKm + reach - lattice.westKm)),
    firstRow: Math.max(0, Math.ceil(yKm - reach - lattice.southKm)),
    lastRow: Math.min(lattice.ny - 1, Math.floor(yKm + reach - lattice.southKm)),
  };
}

function peakNow(cell: Cell, minute: number): number {
  return cell.peakMmPerHour * vigourNow(cell, minute);
}

/** A shower's strength over its life: 0 before and after, 1 at its height. */
function vigourNow(cell: Cell, minute: number): number {
  const share = (minute - cell.midMinute) / cell.lifeMinutes;
  return Math.abs(share) >= 0.5 ? 0 : Math.cos(Math.PI * share) ** 2;
}

function stretchedDistance2(cell: Cell, xKm: number, yKm: number, minute: number): number {
  const place = placeOf(cell, minute);
  const east = xKm - place.xKm;
  const north = yKm - place.yKm;
  const cos = Math.cos(cell.axisRad);
  const sin = Math.sin(cell.axisRad);
  return (
    ((east * cos + north * sin) / cell.longSigmaKm) ** 2 +
    ((north * cos - east * sin) / cell.shortSigmaKm) ** 2
  );
}

/** Two thirds of the showers follow one another along the band; the rest lie anywhere around. */
export function demoCells(random: RandomStream, shape: StormShape): Cell[] {
  const { districtHalfKm, surroundingsHalfKm, minutes } = shape;
  const { xKmPerMinute, yKmPerMinute } = DEMO_DRIFT;
  const speed = Math.hypot(xKmPerMinute, yKmPerMinute);
  const alongX = xKmPerMinute / speed;
  const alongY = yKmPerMinute / speed;
  const cells: Cell[] = [];
  const inBand = 8 + Math.round(minutes / 14);
  const around = Math.round(minutes / 12);
  for (let i = 0; i < inBand + around; i++) {
    const band = i < inBand;
    // Every fifth shower of the band is strong and hardly moves: that is where the totals grow.
    const anchored = band && i % 5 === 0;
    const pace = anchored ? 0.35 : 1;
    const along = random.between(-1, 1) * districtHalfKm;
    const across = districtHalfKm * (0.22 + 0.17 * random.normal());
    const shortSigmaKm = random.between(2.2, 3.8);
    cells.push({
      midMinute: random.between(0.05, 0.95) * minutes,
      lifeMinutes: random.between(40, 85),
      xKm: band ? along * alongX + across * alongY : random.between(-1, 1) * surroundingsHalfKm,
      yKm: band ? along * alongY - across * alongX : random.between(-1, 1) * surroundingsHalfKm,
      xKmPerMinute: xKmPerMinute * pace * random.between(0.85, 1.1),
      yKmPerMinute: yKmPerMinute * pace * random.between(0.8, 1.15),
      peakMmPerHour: (anchored ? 1.5 : 1) * random.between(20, 80),
      longSigmaKm: shortSigmaKm * random.between(1, 1.9),
      shortSigmaKm,
      axisRad: random.between(0.2, 1.4),
    });
  }
  return cells;
}
