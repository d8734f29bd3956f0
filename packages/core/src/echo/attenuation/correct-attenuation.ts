import { addEffect, markBit, type PolarEcho } from "../polar-echo.ts";
import {
  type AttenuationMethod,
  type AttenuationSettings,
  DEFAULT_ATTENUATION_SETTINGS,
} from "./attenuation-settings.ts";
import type { LearnedAttenuation } from "./learned.ts";
import { type PhaseCoefficients, phaseCoefficients } from "./phase-coefficients.ts";
import { lossByReflectivity, notRain, shareOutByZphi } from "./rain-path.ts";

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
  if (learned.alphaDbPerDeg === 0 || (!byPhase && learned.hitschfeldBordanFactor === 0)) {
    return nothing("learned: this echo shows no loss by rain");
  }

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
    if (wavelengthM === undefined) return nothing("neither the wavelength nor a coefficient is known");
    method = "hitschfeld-bordan";
    if (settings.method === "linear" || settings.method === "zphi") {
      reason = `${settings.method} needs a PHIDP that was worked up, and a coefficient`;
    }
    lossByReflectivity(echo, loss, notRain(echo, settings), factorOf(learned, published), settings);
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

/**
 * What is learned of the loss per degree holds for the law of reflectivity too: drops that take more for their phase
 * take more for their echo (house rule). Without it a sweep whose phase cannot be told would be corrected otherwise
 * than its neighbours.
 */
function factorOf(learned: LearnedAttenuation, published: PhaseCoefficients | undefined): number {
  if (learned.hitschfeldBordanFactor !== undefined) return learned.hitschfeldBordanFactor;
  if (learned.alphaDbPerDeg === undefined || published === undefined) return 1;
  return learned.alphaDbPerDeg / published.loss.dbPerDeg;
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
