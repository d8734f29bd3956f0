import { type Complex, dielectricFactor, refractiveIndex, waterPermittivity } from "./dielectric.ts";
import { frequencyHz } from "./units.ts";

/** Cross-sections of a sphere over the area of its disc. */
export interface ScatteringEfficiency {
  readonly extinction: number;
  /** Of the radar cross-section: a perfect isotropic scatterer has 1. */
  readonly backscatter: number;
}

/**
 * Extinction and backscatter of a sphere by the Mie series.
 *
 * Source: Bohren and Huffman (1983), Absorption and Scattering of Light by Small Particles, chapter 4:
 * logarithmic derivatives by downward recurrence. The Riccati-Bessel functions of the size are built from
 * such derivatives too, so that spheres far below the wavelength lose no digits.
 *
 * @param sizeParameter - circumference over wavelength, above 0, up to a few hundred
 * @param index - refractive index, imaginary part 0 or positive
 */
export function mieEfficiency(sizeParameter: number, index: Complex): ScatteringEfficiency {
  const x = sizeParameter;
  const terms = Math.ceil(x + 4 * Math.cbrt(x) + 2);
  const inside = logarithmicDerivatives({ re: index.re * x, im: index.im * x }, terms);
  const outside = logarithmicDerivatives({ re: x, im: 0 }, terms);
  const indexSize2 = index.re * index.re + index.im * index.im;
  let psi0 = Math.sin(x);
  let chiBefore = -Math.sin(x);
  let chi0 = Math.cos(x);
  let extinction = 0;
  let backRe = 0;
  let backIm = 0;
  for (let n = 1; n <= terms; n++) {
    const psi = psi0 / ((outside[2 * n] as number) + n / x);
    const chi = ((2 * n - 1) / x) * chi0 - chiBefore;
    const dRe = inside[2 * n] as number;
    const dIm = inside[2 * n + 1] as number;
    const a = coefficient(
      (dRe * index.re + dIm * index.im) / indexSize2 + n / x,
      (dIm * index.re - dRe * index.im) / indexSize2,
      psi,
      psi0,
      chi,
      chi0,
    );
    const b = coefficient(
      dRe * index.re - dIm * index.im + n / x,
      dRe * index.im + dIm * index.re,
      psi,
      psi0,
      chi,
      chi0,
    );
    const weight = 2 * n + 1;
    extinction += weight * (a.re + b.re);
    const sign = n % 2 === 0 ? weight : -weight;
    backRe += sign * (a.re - b.re);
    backIm += sign * (a.im - b.im);
    chiBefore = chi0;
    psi0 = psi;
    chi0 = chi;
  }
  return { extinction: (2 * extinction) / (x * x), backscatter: (backRe ** 2 + backIm ** 2) / (x * x) };
}

/** One scattering coefficient: (f psi_n - psi_n-1) / (f xi_n - xi_n-1) with xi = psi - i chi. */
function coefficient(
  fRe: number,
  fIm: number,
  psi: number,
  psiBefore: number,
  chi: number,
  chiBefore: number,
): Complex {
  const upRe = fRe * psi - psiBefore;
  const upIm = fIm * psi;
  const downRe = upRe + fIm * chi;
  const downIm = upIm - fRe * chi + chiBefore;
  const size2 = downRe * downRe + downIm * downIm;
  return { re: (upRe * downRe + upIm * downIm) / size2, im: (upIm * downRe - upRe * downIm) / size2 };
}

/** D_n = psi_n' / psi_n for n = 0..terms, as pairs of real and imaginary parts. */
function logarithmicDerivatives(z: Complex, terms: number): Float64Array {
  const from = Math.ceil(Math.max(terms, Math.hypot(z.re, z.im))) + 16;
  const pairs = new Float64Array(2 * (from + 1));
  const size2 = z.re * z.re + z.im * z.im;
  for (let n = from; n > 0; n--) {
    const orderRe = (n * z.re) / size2;
    const orderIm = (-n * z.im) / size2;
    const sumRe = (pairs[2 * n] as number) + orderRe;
    const sumIm = (pairs[2 * n + 1] as number) + orderIm;
    const sum2 = sumRe * sumRe + sumIm * sumIm;
    pairs[2 * n - 2] = orderRe - sumRe / sum2;
    pairs[2 * n - 1] = orderIm + sumIm / sum2;
  }
  return pairs;
}

/** A drop of water as waves of one length meet it, at one temperature. */
export interface DropScattering {
  /** Extinction cross-section, m2. */
  readonly extinctionM2: number;
  /** Backscatter by the Mie series over that of the Rayleigh law, which the radar equation takes for granted; dB. */
  readonly mieOverRayleighDb: number;
}

/**
 * How a spherical drop scatters.
 *
 * Source: {@link mieEfficiency} with water of {@link waterPermittivity}; the Rayleigh backscatter efficiency
 * is 4 x4 |K|2. Drops above about 2 mm are flattened, which no sphere shows.
 *
 * @param diameterMm - above 0, to 10
 */
export function scatteringOfDrop(
  diameterMm: number,
  wavelengthM: number,
  temperatureC: number,
): DropScattering {
  const permittivity = waterPermittivity(frequencyHz(wavelengthM) / 1e9, temperatureC);
  const sizeParameter = (Math.PI * diameterMm * 1e-3) / wavelengthM;
  const { extinction, backscatter } = mieEfficiency(sizeParameter, refractiveIndex(permittivity));
  const rayleigh = 4 * sizeParameter ** 4 * dielectricFactor(permittivity);
  return {
    extinctionM2: extinction * (Math.PI / 4) * (diameterMm * 1e-3) ** 2,
    mieOverRayleighDb: 10 * Math.log10(backscatter / rayleigh),
  };
}
