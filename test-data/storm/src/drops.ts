/**
 * What a population of raindrops rains and echoes. The drops follow the normalised gamma distribution of
 * Testud et al. (2001), J. Appl. Meteorol. 40, 1118-1140:
 *
 *   N(D) = Nw f(mu) (D/Dm)^mu exp(-(4+mu) D/Dm),  f(mu) = (6/4^4) (4+mu)^(mu+4) / Gamma(mu+4)
 *
 * and fall at 3.78 D^0.67 m/s (Atlas and Ulbrich, 1977, J. Appl. Meteorol. 16, 1322-1331), which makes
 * every integral below a closed form.
 */
const FALL_COEFFICIENT = 3.78;
const FALL_EXPONENT = 0.67;

const LN_1_619 = Math.log(1.619);

/** R = coefficient * Nw * Dm^RATE_EXPONENT. */
export const RATE_EXPONENT = 4 + FALL_EXPONENT;

// Lanczos (1964), SIAM J. Numer. Anal. 1, 86-96; coefficients for g = 7, n = 9 as widely tabulated.
const LANCZOS = [
  0.99999999999980993, 676.5203681218851, -1259.1392167224028, 771.32342877765313, -176.61502916214059,
  12.507343278686905, -0.13857109526572012, 9.9843695780195716e-6, 1.5056327351493116e-7,
];

/** Natural logarithm of the gamma function, for x at or above 0.5. */
export function lnGamma(x: number): number {
  let sum = LANCZOS[0]!;
  for (let term = 1; term < LANCZOS.length; term++) sum += LANCZOS[term]! / (x - 1 + term);
  const t = x + 6.5;
  return 0.5 * Math.log(2 * Math.PI) + (x - 0.5) * Math.log(t) - t + Math.log(sum);
}

/** ln of f(mu) Gamma(n+mu) / (4+mu)^(n+mu): the part of the n-th moment that only mu decides. */
function lnMomentShape(mu: number, order: number): number {
  const lnShape = Math.log(6 / 256) + (mu + 4) * Math.log(4 + mu) - lnGamma(mu + 4);
  return lnShape + lnGamma(order + mu) - (order + mu) * Math.log(4 + mu);
}

/** ln of R / (Nw Dm^4.67), R in mm/h, Nw in m-3 mm-1, Dm in mm. */
export function lnRateCoefficient(mu: number): number {
  return Math.log(6e-4 * Math.PI * FALL_COEFFICIENT) + lnMomentShape(mu, RATE_EXPONENT);
}

/** ln of Z / (Nw Dm^7), Z in mm6 m-3: Rayleigh scattering. */
export function lnReflectivityCoefficient(mu: number): number {
  return lnMomentShape(mu, 7);
}

/** Liquid water, g m-3; the same for every mu. */
export function waterGramPerM3(nw: number, dmMm: number): number {
  return ((1e-3 * Math.PI) / 256) * nw * dmMm * dmMm * dmMm * dmMm;
}

/**
 * One-way specific differential phase times the wavelength: deg/km times m.
 *
 * KDP = (180/lambda) 10^-3 C W (1 - rm) with C = 3.75 (Bringi and Chandrasekar, 2001, Polarimetric Doppler
 * Weather Radar, section 7.1; from memory) and drops of axis ratio 1.03 - 0.062 D (Pruppacher and Beard,
 * 1970, Q. J. R. Meteorol. Soc. 96, 247-256), whose mass-weighted mean is 1.03 - 0.062 Dm. Drops that the
 * straight line would make taller than wide count as spheres.
 */
export function phaseTimesWavelength(waterG: number, dmMm: number): number {
  return Math.max(0, 180e-3 * 3.75 * waterG * (0.062 * dmMm - 0.03));
}

/**
 * Differential reflectivity in dB, from Dm = 1.619 ZDR^0.485 (Bringi and Chandrasekar, 2001, section 7.1;
 * from memory).
 *
 * @param lnDm - natural logarithm of Dm in mm, as the callers have it at hand
 */
export function differentialReflectivityDb(lnDm: number): number {
  return Math.exp((lnDm - LN_1_619) / 0.485);
}
