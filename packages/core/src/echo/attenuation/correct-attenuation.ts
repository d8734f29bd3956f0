import { beamHeightM, effectiveRadiusM } from "../../beam.ts";
import { zMm6PerM3 } from "../../units.ts";
import { addEffect, markBit, type PolarEcho } from "../polar-echo.ts";
import {
  type AttenuationMethod,
  type AttenuationSettings,
  attenuationLawOfWavelength,
  DEFAULT_ATTENUATION_SETTINGS,
} from "./attenuation-settings.ts";
import { hitschfeldBordanBracket, lossOfBracketTwoWayDb } from "./hitschfeld-bordan.ts";
import type { LearnedAttenuation } from "./learned.ts";
import { phaseCoefficients } from "./phase-coefficients.ts";
import { zphiConstant, zphiLossTwoWayDb } from "./zphi.ts";

/** What the correction of attenuation did to a sweep. */
export interface AttenuationReport {
  /** The method that was used; `none` where nothing was done. */
  readonly method: Exclude<AttenuationMethod, "auto">;
  /** Why nothing, or not what was asked for, was done. */
  readonly reason?: string;
  /** Two-way loss per degree, and where it comes from; for methods by phase. */
  readonly alphaDbPerDeg?: number;
  readonly alphaFrom?: "learned" | "published";
  /** Most two-way loss by rain that was corrected anywhere. */
  readonly mostLossDb: number;
  /** Gates with echo that became not observed because the loss before them is more than can be corrected. */
  readonly echoGatesLost: number;
  /** Gates below detection that became not observed because rain could hide behind the loss. */
  readonly dryGatesLost: number;
  /** Whether ZDR was freed of its differential loss. */
  readonly zdrCorrected: boolean;
}

const LOST = markBit("lost-in-attenuation");
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

  constructor(exponent: number, mostDbz: number) {
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

/**
 * Gives rain's two-way loss back to the echo, and marks as not observed what lies behind more than can be told.
 *
 * By phase: linear in PHIDP, or shared out along paths in rain by ZPHI. By reflectivity: Hitschfeld and Bordan
 * (1954), closed form. Gates that are not observed in the middle of rain are passed over: what they take is
 * interpolated. Neither hail nor melting snow is given a loss by its echo.
 *
 * Call `workUpPhase` first. Needs the wavelength, but for a learned coefficient.
 */
export function correctAttenuation(
  echo: PolarEcho,
  learned: LearnedAttenuation = {},
  settings: AttenuationSettings = DEFAULT_ATTENUATION_SETTINGS,
): AttenuationReport {
  const nothing = (reason: string): AttenuationReport => ({
    method: "none",
    reason,
    mostLossDb: 0,
    echoGatesLost: 0,
    dryGatesLost: 0,
    zdrCorrected: false,
  });
  if (settings.method === "none") return nothing("switched off");
  const { wavelengthM } = echo.header;
  const published = wavelengthM === undefined ? undefined : phaseCoefficients(wavelengthM);
  const alpha = learned.alphaDbPerDeg ?? published?.loss.dbPerDeg;
  const byPhase =
    settings.method !== "hitschfeld-bordan" && echo.rainPhaseDeg !== undefined && alpha !== undefined;
  if (byPhase && alpha === 0) return nothing("learned: this echo shows no loss by rain");

  const loss = new Float32Array(echo.dbz.length);
  let reason: string | undefined;
  let method: "linear" | "zphi" | "hitschfeld-bordan";
  let zdrCorrected = false;
  if (byPhase) {
    method = settings.method === "linear" ? "linear" : "zphi";
    const phase = echo.rainPhaseDeg as Float32Array;
    for (let gate = 0; gate < loss.length; gate++) loss[gate] = alpha * (phase[gate] as number);
    if (method === "zphi") shareOutByZphi(echo, loss, notRain(echo, settings), alpha, settings);
    const ratio = published === undefined ? 0 : published.differentialLoss.dbPerDeg / published.loss.dbPerDeg;
    zdrCorrected = correctZdr(echo, loss, (learned.differentialDbPerDeg ?? ratio * alpha) / alpha);
  } else {
    const factor = learned.hitschfeldBordanFactor ?? 1;
    if (wavelengthM === undefined) return nothing("neither the wavelength nor a coefficient is known");
    if (factor === 0) return nothing("learned: this echo shows no loss by rain");
    method = "hitschfeld-bordan";
    if (settings.method === "linear" || settings.method === "zphi") {
      reason = `${settings.method} needs a PHIDP that was worked up, and a coefficient`;
    }
    lossByReflectivity(echo, loss, notRain(echo, settings), factor, settings);
  }
  const limitDb = byPhase ? settings.phaseLimitDb : settings.hitschfeldBordanLimitDb;
  const lost = loseWhatLiesBehind(echo, loss, limitDb, settings);
  return {
    method,
    ...(reason === undefined ? {} : { reason }),
    ...(byPhase
      ? {
          alphaDbPerDeg: alpha,
          alphaFrom: learned.alphaDbPerDeg === undefined ? ("published" as const) : ("learned" as const),
        }
      : {}),
    ...lost,
    zdrCorrected,
  };
}

/** 1 where echo is no rain, so that its loss does not follow from its Z: hail, melting snow, snow. */
function notRain(echo: PolarEcho, settings: AttenuationSettings): Uint8Array {
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
function shareOutByZphi(
  echo: PolarEcho,
  loss: Float32Array,
  skip: Uint8Array,
  alpha: number,
  settings: AttenuationSettings,
): void {
  const { dbz } = echo;
  const { gateCount } = echo.header;
  const table = new PowerTable(settings.zphiExponent, MOST_RAIN_DBZ);
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
function lossByReflectivity(
  echo: PolarEcho,
  loss: Float32Array,
  skip: Uint8Array,
  factor: number,
  settings: AttenuationSettings,
): void {
  const { dbz, header } = echo;
  const { gateCount, gateLengthM, firstGateCentreM } = header;
  const law = attenuationLawOfWavelength(header.wavelengthM as number, settings.relation);
  const table = new PowerTable(law.exponent, MOST_RAIN_DBZ);
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

/** Takes the differential loss off a copy of ZDR. */
function correctZdr(echo: PolarEcho, loss: Float32Array, share: number): boolean {
  const { zdrDb } = echo;
  if (zdrDb === undefined || share === 0) return false;
  const corrected = new Float32Array(zdrDb.length);
  for (let gate = 0; gate < zdrDb.length; gate++) {
    corrected[gate] = (zdrDb[gate] as number) + share * (loss[gate] as number);
  }
  echo.zdrDb = corrected;
  return true;
}

/** Adds the loss to the echo; what lies behind too much of it becomes not observed. */
function loseWhatLiesBehind(
  echo: PolarEcho,
  loss: Float32Array,
  limitDb: number,
  settings: AttenuationSettings,
): Pick<AttenuationReport, "mostLossDb" | "echoGatesLost" | "dryGatesLost"> {
  const { dbz, marks, header } = echo;
  const { gateCount } = header;
  const hiding = hidingLossDb(echo, settings);
  const effect = new Float32Array(loss.length);
  const gas = echo.twoWayLossDb;
  const total = gas === undefined ? new Float32Array(loss.length) : gas.slice();
  let mostLossDb = 0;
  let echoGatesLost = 0;
  let dryGatesLost = 0;
  for (let from = 0; from < dbz.length; from += gateCount) {
    for (let gate = 0; gate < gateCount; gate++) {
      const i = from + gate;
      const lossDb = loss[i] as number;
      if (lossDb === 0) continue;
      const before = total[i] as number;
      // Behind the stop of Hitschfeld-Bordan the loss itself is not known.
      total[i] = lossDb === Number.POSITIVE_INFINITY ? Number.NaN : before + lossDb;
      const value = dbz[i] as number;
      if (value === Number.NEGATIVE_INFINITY) {
        if (lossDb > limitDb || before + lossDb > (hiding[gate] as number)) {
          dryGatesLost++;
          marks[i] = (marks[i] as number) | LOST;
          effect[i] = Number.NaN;
        }
      } else if (lossDb > limitDb) {
        if (!Number.isNaN(value)) echoGatesLost++;
        marks[i] = (marks[i] as number) | LOST;
        effect[i] = Number.NaN;
      } else {
        if (lossDb > mostLossDb) mostLossDb = lossDb;
        effect[i] = lossDb;
      }
    }
  }
  addEffect(echo, "attenuation", effect);
  echo.twoWayLossDb = total;
  return { mostLossDb, echoGatesLost, dryGatesLost };
}

/** Loss behind which echo of `hiddenDbz` is not seen, by gate of a ray. */
function hidingLossDb({ header }: PolarEcho, settings: AttenuationSettings): Float64Array {
  const at1Km = settings.detectableAt1KmDbz;
  return Float64Array.from({ length: header.gateCount }, (_, gate) => {
    if (at1Km === undefined) return settings.lossLimitDb;
    const rangeKm = (header.firstGateCentreM + gate * header.gateLengthM) / 1000;
    return Math.max(0, settings.hiddenDbz - at1Km - 20 * Math.log10(rangeKm));
  });
}
