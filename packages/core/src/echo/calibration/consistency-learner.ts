import { beamDiameterM, effectiveRadiusM, gateGeometry } from "../../beam.ts";
import { midEpochMs } from "../../model/radar.ts";
import { phaseCoefficients } from "../attenuation/phase-coefficients.ts";
import { folded } from "../attenuation/phase-gates.ts";
import { markBit, type PolarEcho } from "../polar-echo.ts";
import { type PhaseOfEcho, phaseOfEcho, ZDR_RANGE_DB, ZDR_STEP_DB } from "./drop-phase.ts";
import type { Estimate } from "./overlap-difference.ts";
import { LEAST_BLOCKS, TIME_BLOCKS, timeBlocks } from "./robust-line.ts";

/** What Z, ZDR and PHIDP together tell of a radar's calibration: how much more it shows than is true. */
export interface ConsistencyEstimate extends Estimate {
  /** Stretches of rays. */
  readonly sampleCount: number;
}

/** Echo of rain: below it ZDR and phase are noise, above it there may be hail (common practice). */
const RAIN_DBZ = { low: 15, high: 50 } as const;
const LEAST_CORRELATION = 0.95;
/**
 * Behind more loss than this, by the customary coefficient of the band, what its correction may be wrong by would pass for
 * calibration: it harms Z and, seen through ZDR, more than Z (house rule).
 */
const MOST_LOSS_DB = 0.5;
/** A stretch needs so many gates, and so much expected phase, to say anything. */
const LEAST_GATES = 8;
const LEAST_RISE_DEG = 2;
const LEAST_STRETCHES = 30;
/**
 * ZDR of a stretch, weighted by expected phase. Shapes of drops that are published differ by 3 dB in KDP / Z at 1 dB of ZDR,
 * and by 1.5 dB at 2 dB: large drops are known better (house rule).
 */
const LEAST_ZDR_DB = 1.2;
/** Rain is looked for up to this height above the antenna, unless it is known where snow begins (house rule). */
const RAIN_DEPTH_M = 1000;
/** ZDR is averaged over so many gates on either side. */
const ZDR_REACH = 3;
const UNFIT = markBit("hail") | markBit("melting") | markBit("snow") | markBit("blocked");
const DEFAULT_BEAM_DEG = 1;
/** PHIDP may be written modulo 180 or 360 degrees; no stretch rises by as much as either. */
const FOLD_DEG = 180;

interface RoundSums {
  square: number;
  product: number;
  stretches: number;
}

/**
 * Learns a radar's calibration from the consistency of Z, ZDR and PHIDP in rain (see `phaseOfEcho`): Z and ZDR say how
 * PHIDP should rise along a ray, and if it rises less, Z reads too high.
 *
 * Measured PHIDP is fitted to the expected one within each stretch of rain, its level free, so that neither the system's
 * phase nor noise matters; one ratio for all stretches. Takes sweeps whose attenuation was corrected, ZDR's among it.
 */
export class ConsistencyLearner {
  readonly #rounds = new Map<number, RoundSums>();
  readonly #rainBelowAslM: number | undefined;
  #relation: PhaseOfEcho | undefined;

  /** @param rainBelowAslM - height below which there is neither snow nor melting, where known */
  constructor(rainBelowAslM?: number) {
    this.#rainBelowAslM = rainBelowAslM;
  }

  /** @returns false where the sweep lacks ZDR or PHIDP, or is of another band than S, C and X */
  add(echo: PolarEcho): boolean {
    const { header, zdrDb, phidpDeg } = echo;
    const { wavelengthM, gateCount } = header;
    const loss = wavelengthM === undefined ? undefined : phaseCoefficients(wavelengthM)?.loss;
    if (wavelengthM === undefined || loss === undefined) return false;
    if (zdrDb === undefined || phidpDeg === undefined) return false;
    const mostPhaseDeg = MOST_LOSS_DB / loss.dbPerDeg;
    if (this.#relation?.wavelengthM !== wavelengthM) this.#relation = phaseOfEcho(wavelengthM);
    const lastGate = this.#lastGateInRain(echo);
    const sums: RoundSums = { square: 0, product: 0, stretches: 0 };
    const ray = new RayFit(gateCount);
    for (let from = 0; from < phidpDeg.length; from += gateCount) {
      const reach = ray.expect(echo, zdrDb, from, lastGate, mostPhaseDeg, this.#relation);
      let start = 0;
      for (let gate = 0; gate <= reach; gate++) {
        if (gate < reach && ray.isRain(gate)) continue;
        ray.fit(phidpDeg, from, start, gate, sums);
        start = gate + 1;
      }
    }
    if (sums.stretches === 0) return true;
    const instant = midEpochMs(header);
    const before = this.#rounds.get(instant);
    this.#rounds.set(instant, {
      square: sums.square + (before?.square ?? 0),
      product: sums.product + (before?.product ?? 0),
      stretches: sums.stretches + (before?.stretches ?? 0),
    });
    return true;
  }

  /** Gates nearer than the returned one lie below melting snow with the whole of the beam. */
  #lastGateInRain({ header }: PolarEcho): number {
    const { site, elevationDeg, gateCount } = header;
    const top = this.#rainBelowAslM ?? site.antennaHeightM + RAIN_DEPTH_M;
    const { heightM, slantRangeM } = gateGeometry(header, elevationDeg, effectiveRadiusM());
    const beamDeg = header.beamWidthDeg?.vertical ?? DEFAULT_BEAM_DEG;
    const last = heightM.findIndex(
      (height, gate) =>
        site.antennaHeightM + height + beamDiameterM(slantRangeM[gate] as number, beamDeg) / 2 > top,
    );
    return last < 0 ? gateCount : last;
  }

  /** @returns undefined for too little rain, or too few times */
  finish(): ConsistencyEstimate | undefined {
    const instants = [...this.#rounds.keys()].sort((one, other) => one - other);
    const sums = instants.map((instant) => this.#rounds.get(instant) as RoundSums);
    const stretches = sums.reduce((sum, { stretches }) => sum + stretches, 0);
    const block = timeBlocks(Float64Array.from(instants), TIME_BLOCKS);
    const blockCount = new Set(block).size;
    if (stretches < LEAST_STRETCHES || blockCount < LEAST_BLOCKS) return undefined;
    const offsetWithout = (left: number): number => {
      let [square, product] = [0, 0];
      sums.forEach((part, k) => {
        if (block[k] === left) return;
        square += part.square;
        product += part.product;
      });
      return -10 * Math.log10(product / square);
    };
    const parts = Array.from({ length: blockCount }, (_, left) => offsetWithout(left));
    const mean = parts.reduce((sum, value) => sum + value, 0) / blockCount;
    const squares = parts.reduce((sum, value) => sum + (value - mean) ** 2, 0);
    const valueDb = offsetWithout(-1);
    const standardErrorDb = Math.sqrt((squares * (blockCount - 1)) / blockCount);
    // Phase that falls where it should rise has no logarithm.
    if (Number.isNaN(valueDb) || Number.isNaN(standardErrorDb)) return undefined;
    return { valueDb, standardErrorDb, sampleCount: stretches };
  }
}

function isFit({ dbz, rhohv, screenedBy, marks, blockedFraction }: PolarEcho, at: number): boolean {
  const value = dbz[at] as number;
  return (
    value >= RAIN_DBZ.low &&
    value <= RAIN_DBZ.high &&
    screenedBy[at] === 0 &&
    ((marks[at] as number) & UNFIT) === 0 &&
    !((rhohv?.[at] ?? 1) < LEAST_CORRELATION) &&
    !((blockedFraction?.[at] ?? 0) > 0.1)
  );
}

/** One ray in work, with room that is used again for the next. */
class RayFit {
  /** Of each gate, both ways; NaN where it is not fit. */
  readonly #riseDeg: Float64Array;
  readonly #zdrDb: Float64Array;
  readonly #expected: Float64Array;
  readonly #measured: Float64Array;

  constructor(gateCount: number) {
    this.#riseDeg = new Float64Array(gateCount);
    this.#zdrDb = new Float64Array(gateCount);
    this.#expected = new Float64Array(gateCount);
    this.#measured = new Float64Array(gateCount);
  }

  isRain(gate: number): boolean {
    return !Number.isNaN(this.#riseDeg[gate]);
  }

  /**
   * Works out how PHIDP should rise in each gate.
   *
   * @returns the gate from which on too much lies before it, by what is expected: to go by measured phase would choose
   *   stretches where it rises little
   */
  expect(
    echo: PolarEcho,
    zdrDb: Float32Array,
    from: number,
    lastGate: number,
    mostPhaseDeg: number,
    { kdpOfZ }: PhaseOfEcho,
  ): number {
    const twoWayKm = (2 * echo.header.gateLengthM) / 1000;
    for (let gate = 0; gate < lastGate; gate++) {
      this.#zdrDb[gate] = isFit(echo, from + gate) ? (zdrDb[from + gate] as number) : Number.NaN;
    }
    let total = 0;
    for (let gate = 0; gate < lastGate; gate++) {
      this.#riseDeg[gate] = Number.NaN;
      if (Number.isNaN(this.#zdrDb[gate])) continue;
      const zdr = meanAround(this.#zdrDb, lastGate, gate);
      const held = Math.min(ZDR_RANGE_DB.high, Math.max(ZDR_RANGE_DB.low, zdr));
      const z = Math.exp((echo.dbz[from + gate] as number) * (Math.LN10 / 10));
      this.#riseDeg[gate] = twoWayKm * z * (kdpOfZ[Math.round(held / ZDR_STEP_DB)] as number);
      total += this.#riseDeg[gate] as number;
      if (total > mostPhaseDeg) return gate;
    }
    return lastGate;
  }

  /** Adds a stretch from one gate up to another to the sums, where it has enough to say. */
  fit(phidpDeg: Float32Array, from: number, start: number, end: number, sums: RoundSums): void {
    if (end - start < LEAST_GATES) return;
    let [expected, level, used, sumX, sumY, sumZdr] = [0, Number.NaN, 0, 0, 0, 0];
    for (let gate = start; gate < end; gate++) {
      const rise = this.#riseDeg[gate] as number;
      const measured = phidpDeg[from + gate] as number;
      if (!Number.isNaN(measured)) {
        level = Number.isNaN(level) ? measured : level + folded(measured - level, FOLD_DEG);
        // Half of a gate's phase lies before its centre.
        const x = expected + rise / 2;
        this.#expected[used] = x;
        this.#measured[used] = level;
        sumX += x;
        sumY += level;
        used++;
      }
      expected += rise;
      sumZdr += rise * (this.#zdrDb[gate] as number);
    }
    if (used < LEAST_GATES || !(expected >= LEAST_RISE_DEG && sumZdr >= LEAST_ZDR_DB * expected)) return;
    let [square, product] = [0, 0];
    for (let k = 0; k < used; k++) {
      const x = (this.#expected[k] as number) - sumX / used;
      square += x * x;
      product += x * ((this.#measured[k] as number) - sumY / used);
    }
    sums.square += square;
    sums.product += product;
    sums.stretches++;
  }
}

/** Mean of what is known up to three gates off. */
function meanAround(values: Float64Array, end: number, gate: number): number {
  let [sum, known] = [0, 0];
  for (let at = Math.max(0, gate - ZDR_REACH); at <= Math.min(end - 1, gate + ZDR_REACH); at++) {
    const value = values[at] as number;
    if (Number.isNaN(value)) continue;
    sum += value;
    known++;
  }
  return sum / known;
}
