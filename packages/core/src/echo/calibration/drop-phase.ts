import { type Complex, dielectricFactor, waterPermittivity } from "../../dielectric.ts";
import { type DropSpectrum, normalisedSpectrum } from "../../drop-sizes.ts";
import { frequencyHz } from "../../units.ts";

/** What a spectrum of oblate drops shows to a radar with horizontal and vertical polarisation. */
export interface OblateEcho {
  /** Horizontal, mm6 m-3, for |K|2 of water. */
  readonly zMm6PerM3: number;
  readonly zdrDb: number;
  /** One way. */
  readonly kdpDegPerKm: number;
}

/** Classes of 0.1 mm up to 8 mm. */
const CLASS_MM = 0.1;
const CLASS_COUNT = 80;

/** Axis ratio of falling drops by their diameter in mm, not held to 1. */
export type DropShape = (diameterMm: number) => number;

/** Beard and Chuang (1987), J. Atmos. Sci. 44, 1509-1524: drops at rest in their fall. From memory. */
const equilibrium: DropShape = (d) => 1.0048 + d * (5.7e-4 + d * (-2.628e-2 + d * (3.682e-3 - d * 1.677e-4)));

/**
 * Shapes that are published; the first one is used.
 *
 * Pruppacher and Beard (1970), Q. J. R. Meteorol. Soc. 96, 247-256; Beard and Chuang (1987); Andsager, Beard and Laird
 * (1999), J. Atmos. Sci. 56, 2673-2683, for drops of 1.1 to 4.4 mm that oscillate, equilibrium beside them; Brandes, Zhang
 * and Vivekanandan (2002), J. Appl. Meteorol. 41, 674-685. All but the first from memory.
 */
export const DROP_SHAPES: Readonly<
  Record<"pruppacherBeard" | "beardChuang" | "andsager" | "brandes", DropShape>
> = {
  pruppacherBeard: (d) => 1.03 - 0.062 * d,
  beardChuang: equilibrium,
  andsager: (d) => (d > 1.1 && d < 4.4 ? 1.012 - d * (0.01445 + d * 0.0103) : equilibrium(d)),
  brandes: (d) => 0.9951 + d * (0.0251 + d * (-0.03644 + d * (5.303e-3 - d * 2.492e-4))),
};

/**
 * Polarisability of an oblate drop over that of a sphere of vacuum's size, along one axis: (eps - 1) / (1 + L (eps - 1)) / 3,
 * with the depolarising factor L. Rayleigh and Gans; van de Hulst (1957), Light Scattering by Small Particles, section 6.32.
 */
function polarisability({ re, im }: Complex, depolarising: number): Complex {
  const [topRe, topIm] = [(re - 1) / 3, im / 3];
  const [lowRe, lowIm] = [1 + depolarising * (re - 1), depolarising * im];
  const size = lowRe * lowRe + lowIm * lowIm;
  return { re: (topRe * lowRe + topIm * lowIm) / size, im: (topIm * lowRe - topRe * lowIm) / size };
}

/** Depolarising factor of an oblate spheroid along its short, vertical axis; a third for a sphere. */
function depolarisingFactor(ratio: number): number {
  const square = 1 / (ratio * ratio) - 1;
  // The closed form loses its digits near the sphere; the series starts at 1/3 + 2/15 f2.
  if (square < 1e-4) return 1 / 3 + (2 / 15) * square;
  const f = Math.sqrt(square);
  return ((1 + square) / square) * (1 - Math.atan(f) / f);
}

/**
 * Z, ZDR and KDP of a spectrum of drops with upright axes, all small against the wavelength (Rayleigh-Gans scattering): good
 * at S band, and at C and X band as long as ZDR stays below about 2 dB, before large drops resonate.
 */
export function oblateEcho(
  spectrum: DropSpectrum,
  wavelengthM: number,
  temperatureC = 10,
  shape: DropShape = DROP_SHAPES.pruppacherBeard,
): OblateEcho {
  const permittivity = waterPermittivity(frequencyHz(wavelengthM) / 1e9, temperatureC);
  const sphere = dielectricFactor(permittivity);
  let [zH, zV, phase] = [0, 0, 0];
  for (let k = 0; k < CLASS_COUNT; k++) {
    const diameterMm = (k + 0.5) * CLASS_MM;
    const count =
      spectrum.n0 * diameterMm ** spectrum.mu * Math.exp(-spectrum.lambdaPerMm * diameterMm) * CLASS_MM;
    const vertical = depolarisingFactor(Math.min(1, shape(diameterMm)));
    const alongH = polarisability(permittivity, (1 - vertical) / 2);
    const alongV = polarisability(permittivity, vertical);
    const z = (count * diameterMm ** 6) / sphere;
    zH += z * (alongH.re ** 2 + alongH.im ** 2);
    zV += z * (alongV.re ** 2 + alongV.im ** 2);
    phase += count * diameterMm ** 3 * (alongH.re - alongV.re);
  }
  // Forward amplitude k2 V 3 alpha / 4 pi with V = pi D3 / 6; KDP = (180 / pi) lambda sum; mm3 and km make 1e-9 and 1e3.
  const wavenumber = (2 * Math.PI) / wavelengthM;
  const kdpDegPerKm = ((180 / Math.PI) * wavelengthM * wavenumber ** 2 * 1e-6 * phase) / 8;
  return { zMm6PerM3: zH, zdrDb: 10 * Math.log10(zH / zV), kdpDegPerKm };
}

/** KDP over Z by ZDR, in steps. */
export interface PhaseOfEcho {
  readonly wavelengthM: number;
  /** Shape [steps]: KDP in deg/km of one mm6 m-3 at a ZDR of step * 0.05 dB. */
  readonly kdpOfZ: Float64Array;
}

export const ZDR_STEP_DB = 0.05;
/** ZDR outside says little: noise below, resonance and hail above (common practice). */
export const ZDR_RANGE_DB = { low: 0.5, high: 2.5 } as const;

/**
 * The relation of Z, ZDR and KDP in rain: KDP / Z is a function of ZDR, whatever the number of drops.
 *
 * That the three are consistent, and so tell the calibration of Z: Gorgucci, Scarchilli and Chandrasekar (1992), IEEE
 * Trans. Geosci. Remote Sens. 30, 853-858; Goddard, Tan and Thurai (1994), Electron. Lett. 30, 166-167. Their
 * coefficients are not taken over but worked out by {@link oblateEcho}: the mean in dB over gamma spectra with mu of 0 to
 * 4. Drop shapes decide the level: others that are published lower KDP / Z by 1 to 3 dB.
 */
export function phaseOfEcho(wavelengthM: number, shape?: DropShape): PhaseOfEcho {
  const steps = Math.round(ZDR_RANGE_DB.high / ZDR_STEP_DB) + 1;
  const sumDb = new Float64Array(steps);
  const shapes = [0, 1, 2, 3, 4];
  for (const mu of shapes) {
    let before: { zdrDb: number; db: number } | undefined;
    let step = 0;
    for (let dm = 0.5; step < steps && dm < 6; dm += 0.05) {
      const echo = oblateEcho(normalisedSpectrum(8000, mu, dm), wavelengthM, undefined, shape);
      const here = { zdrDb: echo.zdrDb, db: 10 * Math.log10(echo.kdpDegPerKm / echo.zMm6PerM3) };
      for (; step < steps && step * ZDR_STEP_DB <= here.zdrDb; step++) {
        const from = before ?? here;
        const along = from === here ? 0 : (step * ZDR_STEP_DB - from.zdrDb) / (here.zdrDb - from.zdrDb);
        sumDb[step] = (sumDb[step] as number) + from.db + along * (here.db - from.db);
      }
      before = here;
    }
  }
  return { wavelengthM, kdpOfZ: sumDb.map((db) => 10 ** (db / shapes.length / 10)) };
}
