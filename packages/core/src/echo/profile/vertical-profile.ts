import { beamDiameterM } from "../../beam.ts";
import { errorFunction, scaledErrorComplement } from "../../error-function.ts";
import { decibels } from "../../units.ts";

/**
 * How reflectivity changes with height in rain from a melting layer: straight lines in dB, relative to the
 * rain at the layer's bottom. Heights are above mean sea level.
 *
 * Source of the shape: Kitchen, Brown and Davies (1994), Q. J. R. Meteorol. Soc. 120, 1231-1254; Fabry and
 * Zawadzki (1995), J. Atmos. Sci. 52, 838-851.
 */
export interface VerticalProfile {
  /** Where snow has melted; 0 dB. */
  readonly bottomM: number;
  readonly peakM: number;
  /** Where it begins to melt, near the level of 0 °C; 0 dB again. */
  readonly topM: number;
  /** Of the peak over the rain below, the bright band's excess. */
  readonly peakDb: number;
  /** Per km upwards, above the top; snow loses echo with height, so below 0. */
  readonly slopeAboveDbPerKm: number;
  /** Per km upwards, below the bottom; 0 where rain neither grows nor evaporates as it falls. */
  readonly slopeBelowDbPerKm: number;
}

/** How a profile sits in heights: what is known of the melting layer apart from its echo. */
export interface LayerHeights {
  readonly bottomM: number;
  readonly topM: number;
}

/**
 * Values of common practice for widespread rain of mid latitudes, with the spread that is usual around them
 * (one standard deviation, house rule from the customary ranges: thickness 0.3-0.9 km, excess 4-10 dB,
 * slope -1.5 to -7.5 dB/km).
 */
export const USUAL_PROFILE = {
  thicknessM: { value: 500, spread: 200 },
  peakDb: { value: 6, spread: 2 },
  slopeAboveDbPerKm: { value: -4.5, spread: 1.5 },
} as const;

/**
 * The profile of common practice about a melting layer: peak in the middle, 6 dB, -4.5 dB/km above, level below.
 * Common practice, from memory; see {@link USUAL_PROFILE}.
 */
export function idealisedProfile({ bottomM, topM }: LayerHeights): VerticalProfile {
  return {
    bottomM,
    peakM: (bottomM + topM) / 2,
    topM,
    peakDb: USUAL_PROFILE.peakDb.value,
    slopeAboveDbPerKm: USUAL_PROFILE.slopeAboveDbPerKm.value,
    slopeBelowDbPerKm: 0,
  };
}

/** Profile at a height, dB relative to the rain at the bottom of the layer. */
export function profileDb(profile: VerticalProfile, heightM: number): number {
  const { bottomM, peakM, topM, peakDb } = profile;
  if (heightM <= bottomM) return (profile.slopeBelowDbPerKm * (heightM - bottomM)) / 1000;
  if (heightM >= topM) return (profile.slopeAboveDbPerKm * (heightM - topM)) / 1000;
  if (heightM <= peakM) return (peakDb * (heightM - bottomM)) / (peakM - bottomM);
  return (peakDb * (topM - heightM)) / (topM - peakM);
}

/**
 * Standard deviation over height of the two-way weight of a beam: r theta / (4 sqrt(ln 2)) of the Gaussian
 * pattern, seen aslant, and the length of the gate where the beam climbs.
 *
 * Source: Probert-Jones (1962), Q. J. R. Meteorol. Soc. 88, 485-495, for the pattern; a gate of length L
 * spreads evenly over L sin(elevation).
 *
 * @param gateLengthM - 0 leaves the pattern alone
 */
export function beamSigmaM(
  slantRangeM: number,
  beamWidthDeg: number,
  elevationDeg = 0,
  gateLengthM = 0,
): number {
  const elevationRad = (elevationDeg * Math.PI) / 180;
  const across =
    (beamDiameterM(slantRangeM, beamWidthDeg) / (4 * Math.sqrt(Math.LN2))) * Math.cos(elevationRad);
  const along = gateLengthM * Math.sin(elevationRad);
  return Math.sqrt(across * across + (along * along) / 12);
}

/**
 * What a beam makes of a profile: the mean of its linear values under the two-way Gaussian weight, in dB.
 * Closed form, a normal distribution for each straight piece.
 *
 * @param centreM - height of the beam's centre above mean sea level
 * @param sigmaM - from {@link beamSigmaM}, 0 or more; 0 is the value at the centre
 * @param groundM - what lies below it gets no weight
 */
export function beamProfileDb(
  profile: VerticalProfile,
  centreM: number,
  sigmaM: number,
  groundM = Number.NEGATIVE_INFINITY,
): number {
  if (!(sigmaM > 0)) return profileDb(profile, centreM);
  const { bottomM, peakM, topM, peakDb, slopeBelowDbPerKm, slopeAboveDbPerKm } = profile;
  const [bottom, peak, top, ground] = [bottomM, peakM, topM, groundM].map((m) => (m - centreM) / sigmaM) as [
    number,
    number,
    number,
    number,
  ];
  if (bottom > OUT_OF_SIGHT && slopeBelowDbPerKm === 0) return 0;
  // Slopes in nepers of power per sigma.
  const below = (slopeBelowDbPerKm * NEPERS_PER_DB * sigmaM) / 1000;
  const above = (slopeAboveDbPerKm * NEPERS_PER_DB * sigmaM) / 1000;
  const excess = peakDb * NEPERS_PER_DB;
  let sum = piece(0, bottom, below, ground, bottom) + piece(0, top, above, Math.max(top, ground), Infinity);
  if (peak > bottom) sum += piece(0, bottom, excess / (peak - bottom), Math.max(bottom, ground), peak);
  if (top > peak) sum += piece(excess, peak, -excess / (top - peak), Math.max(peak, ground), top);
  return decibels(sum / piece(0, 0, 0, ground, Infinity));
}

const NEPERS_PER_DB = Math.LN10 / 10;
/** Sigmas from its centre at which a beam has less weight than a double has digits. */
const OUT_OF_SIGHT = 8.3;

/**
 * Integral of exp(v + g (t - t0)) under the normal density from t1 to t2, t in sigmas from the beam's centre:
 * exp(v - g t0 + g²/2) [Phi(t2 - g) - Phi(t1 - g)]. Where both ends lie on one side of the tilted bell,
 * the exponentials are joined with the tails before anything overflows or cancels.
 */
function piece(v: number, t0: number, g: number, t1: number, t2: number): number {
  if (!(t2 > t1)) return 0;
  const [a, b] = [t1 - g, t2 - g];
  if (a >= 0) return tail(v + g * (t1 - t0), t1, a) - tail(v + g * (t2 - t0), t2, b);
  if (b <= 0) return tail(v + g * (t2 - t0), t2, -b) - tail(v + g * (t1 - t0), t1, -a);
  return (
    (Math.exp(v - g * t0 + (g * g) / 2) *
      (errorFunction(b * Math.SQRT1_2) - errorFunction(a * Math.SQRT1_2))) /
    2
  );
}

/** The piece from an end outward, the end at t with the value exp(logValue), `away` sigmas beyond the tilted bell. */
function tail(logValue: number, t: number, away: number): number {
  if (!Number.isFinite(t)) return 0;
  return (Math.exp(logValue - (t * t) / 2) * scaledErrorComplement(away * Math.SQRT1_2)) / 2;
}

/** Shares of a beam in rain, in melting snow and above it; they make 1. */
export interface LayerShares {
  readonly rain: number;
  readonly melting: number;
  readonly snow: number;
}

/** How much of a beam's weight lies below, in and above a melting layer. Parameters as in {@link beamProfileDb}. */
export function layerShares(
  layer: LayerHeights,
  centreM: number,
  sigmaM: number,
  groundM = Number.NEGATIVE_INFINITY,
): LayerShares {
  if (!(sigmaM > 0)) {
    const rain = centreM < layer.bottomM ? 1 : 0;
    const snow = centreM >= layer.topM ? 1 : 0;
    return { rain, melting: 1 - rain - snow, snow };
  }
  const [bottom, top, ground] = [layer.bottomM, layer.topM, groundM].map((m) => (m - centreM) / sigmaM) as [
    number,
    number,
    number,
  ];
  if (bottom > OUT_OF_SIGHT) return { rain: 1, melting: 0, snow: 0 };
  const whole = piece(0, 0, 0, ground, Infinity);
  const rain = piece(0, 0, 0, ground, bottom) / whole;
  const snow = piece(0, 0, 0, Math.max(top, ground), Infinity) / whole;
  return { rain, melting: Math.max(0, 1 - rain - snow), snow };
}
