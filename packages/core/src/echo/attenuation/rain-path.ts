import { beamHeightM, effectiveRadiusM } from "../../beam.ts";
import { zMm6PerM3 } from "../../units.ts";
import { markBit, type PolarEcho } from "../polar-echo.ts";
import { type AttenuationSettings, attenuationLawOfWavelength } from "./attenuation-settings.ts";
import { hitschfeldBordanBracket, lossOfBracketTwoWayDb } from "./hitschfeld-bordan.ts";
import { zphiConstant, zphiLossTwoWayDb } from "./zphi.ts";

const HAIL = markBit("hail");
const MELTING = markBit("melting");
const SNOW = markBit("snow");

/** Echo that is taken for hail's at any polarimetry (common practice), and with low correlation. */
const HAIL_DBZ = 55;
const HAIL_MIXED_DBZ = 50;
const HAIL_CORRELATION = 0.95;
/** Most echo that rain is given for its own loss; what hail adds to it attenuates otherwise (common practice). */
const MOST_RAIN_DBZ = 53;

/** Z to a power by steps of 0.1 dB: a power of ten per gate would cost more than all the rest. */
class PowerTable {
  readonly #powers: Float64Array;

  /** The table of an exponent, made once: a run has one or two. */
  static of(exponent: number): PowerTable {
    const known = POWER_TABLES.get(exponent) ?? new PowerTable(exponent, MOST_RAIN_DBZ);
    POWER_TABLES.set(exponent, known);
    return known;
  }

  private constructor(exponent: number, mostDbz: number) {
    this.#powers = Float64Array.from({ length: TABLE_STEPS }, (_, step) =>
      step === 0 ? 0 : zMm6PerM3(Math.min(mostDbz, step / 10 + TABLE_LOW_DBZ)) ** exponent,
    );
  }

  /** 0 below -40 dBZ and for no echo. */
  at(dbz: number): number {
    const step = Math.round((dbz - TABLE_LOW_DBZ) * 10);
    return step <= 0 ? 0 : (this.#powers[Math.min(step, TABLE_STEPS - 1)] as number);
  }
}
const TABLE_LOW_DBZ = -40;
const TABLE_STEPS = 1300;
const POWER_TABLES = new Map<number, PowerTable>();

/** 1 where echo is no rain, so that its loss does not follow from its Z: hail, melting snow, snow. */
export function notRain(echo: PolarEcho, settings: AttenuationSettings): Uint8Array {
  const { dbz, rhohv, marks, header } = echo;
  const skip = new Uint8Array(dbz.length);
  const { gateCount } = header;
  const radiusM = effectiveRadiusM();
  const bottomM = settings.meltingLayer?.bottomM ?? Number.POSITIVE_INFINITY;
  let rainGates = gateCount;
  for (let gate = gateCount - 1; gate >= 0; gate--) {
    const rangeM = header.firstGateCentreM + gate * header.gateLengthM;
    if (header.site.antennaHeightM + beamHeightM(rangeM, header.elevationDeg, radiusM) >= bottomM) {
      rainGates = gate;
    }
  }
  for (let from = 0; from < dbz.length; from += gateCount) {
    for (let gate = 0; gate < gateCount; gate++) {
      const i = from + gate;
      const value = dbz[i] as number;
      const hail =
        value >= HAIL_DBZ ||
        (value >= HAIL_MIXED_DBZ && rhohv !== undefined && (rhohv[i] as number) < HAIL_CORRELATION);
      if (hail || gate >= rainGates || ((marks[i] as number) & (HAIL | MELTING | SNOW)) !== 0) skip[i] = 1;
    }
  }
  return skip;
}

/** Along each path through rain only, the loss between its ends goes to where the echo says that the rain is. */
export function shareOutByZphi(
  echo: PolarEcho,
  loss: Float32Array,
  skip: Uint8Array,
  alpha: number,
  settings: AttenuationSettings,
): void {
  const { dbz } = echo;
  const { gateCount } = echo.header;
  const table = PowerTable.of(settings.zphiExponent);
  const before = new Float64Array(gateCount);
  const enoughDb = alpha * settings.leastPathPhaseDeg;
  for (let from = 0; from < dbz.length; from += gateCount) {
    let gate = from;
    const end = from + gateCount;
    while (gate < end) {
      if (skip[gate] === 1 || !((dbz[gate] as number) > Number.NEGATIVE_INFINITY)) {
        gate++;
        continue;
      }
      // A path runs on over gates that are not observed, but ends where rain does, and where the phase has risen
      // enough to be known again.
      const r1 = gate;
      const start = loss[r1] as number;
      let r2 = gate;
      for (; gate < end && skip[gate] === 0 && dbz[gate] !== Number.NEGATIVE_INFINITY; gate++) {
        if (Number.isNaN(dbz[gate] as number)) continue;
        r2 = gate;
        if ((loss[r2] as number) - start >= enoughDb) break;
      }
      // The next path starts where this one ends, so that no gap is left between them.
      if (gate === r2 && r2 === r1) gate++;
      const pathLossDb = (loss[r2] as number) - start;
      if (pathLossDb < enoughDb) continue;
      const total = integrate(dbz, table, r1, r2, before);
      const constant = zphiConstant(pathLossDb, settings.zphiExponent);
      for (let i = r1; i <= r2; i++) {
        loss[i] =
          start + zphiLossTwoWayDb((before[i - r1] as number) / total, constant, settings.zphiExponent);
      }
    }
  }
}

/**
 * Integral of Z to a power from r1 to each gate's centre by trapezoids, in gates; what is not observed is
 * interpolated.
 */
function integrate(
  dbz: Float32Array,
  table: PowerTable,
  r1: number,
  r2: number,
  before: Float64Array,
): number {
  let last = table.at(dbz[r1] as number);
  let lastGate = r1;
  let sum = 0;
  before[0] = 0;
  for (let i = r1 + 1; i <= r2; i++) {
    const value = dbz[i] as number;
    if (Number.isNaN(value)) continue;
    const here = table.at(value);
    const many = i - lastGate;
    for (let k = 1; k <= many; k++) {
      const share = k / many;
      before[lastGate + k - r1] = sum + k * (last + 0.5 * share * (here - last));
    }
    sum += 0.5 * many * (last + here);
    last = here;
    lastGate = i;
  }
  return sum;
}

/** Closed form of Hitschfeld and Bordan along every ray; Infinity from the gate on at which it stops. */
export function lossByReflectivity(
  echo: PolarEcho,
  loss: Float32Array,
  skip: Uint8Array,
  factor: number,
  settings: AttenuationSettings,
): void {
  const { dbz, header } = echo;
  const { gateCount, gateLengthM, firstGateCentreM } = header;
  const law = attenuationLawOfWavelength(header.wavelengthM as number, settings.relation);
  const table = PowerTable.of(law.exponent);
  const perGate = (factor * law.coefficient * gateLengthM) / 1000;
  for (let from = 0; from < dbz.length; from += gateCount) {
    let last = Number.NaN;
    let gap = 0;
    let integral = 0;
    let lossDb = 0;
    for (let gate = 0; gate < gateCount; gate++) {
      const i = from + gate;
      const value = dbz[i] as number;
      if (Number.isNaN(value)) {
        gap++;
        loss[i] = lossDb;
        continue;
      }
      // Hail is given what the heaviest rain takes; snow and what melts take nothing that its echo tells.
      const here = skip[i] === 1 && value < HAIL_MIXED_DBZ ? 0 : table.at(value);
      const step = Number.isNaN(last)
        ? here * Math.min(firstGateCentreM / gateLengthM, 0.5)
        : 0.5 * (last + here) * (gap + 1);
      last = here;
      gap = 0;
      if (step > 0) {
        integral += perGate * step;
        const bracket = hitschfeldBordanBracket(integral, law.exponent);
        lossDb =
          bracket < settings.leastBracket
            ? Number.POSITIVE_INFINITY
            : lossOfBracketTwoWayDb(bracket, law.exponent);
      }
      loss[i] = lossDb;
    }
  }
}
