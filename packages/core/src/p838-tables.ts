/** Coefficients of one regression over log10 of the frequency in GHz: Gauss terms a, b, c, and a straight line. */
export interface CoefficientTable {
  readonly terms: readonly (readonly [number, number, number])[];
  readonly slope: number;
  readonly constant: number;
}

/** Recommendation ITU-R P.838-3 (2005), Table 1: log10 of k, horizontal polarisation. */
export const P838_K_H: CoefficientTable = {
  terms: [
    [-5.3398, -0.10008, 1.13098],
    [-0.35351, 1.2697, 0.454],
    [-0.23789, 0.86036, 0.15354],
    [-0.94158, 0.64552, 0.16817],
  ],
  slope: -0.18961,
  constant: 0.71147,
};

/** Table 2: log10 of k, vertical polarisation. */
export const P838_K_V: CoefficientTable = {
  terms: [
    [-3.80595, 0.56934, 0.81061],
    [-3.44965, -0.22911, 0.51059],
    [-0.39902, 0.73042, 0.11899],
    [0.50167, 1.07319, 0.27195],
  ],
  slope: -0.16398,
  constant: 0.63297,
};

/** Table 3: alpha, horizontal polarisation. */
export const P838_ALPHA_H: CoefficientTable = {
  terms: [
    [-0.14318, 1.82442, -0.55187],
    [0.29591, 0.77564, 0.19822],
    [0.32177, 0.63773, 0.13164],
    [-5.3761, -0.9623, 1.47828],
    [16.1721, -3.2998, 3.4399],
  ],
  slope: 0.67849,
  constant: -1.95537,
};

/** Table 4: alpha, vertical polarisation. */
export const P838_ALPHA_V: CoefficientTable = {
  terms: [
    [-0.07771, 2.3384, -0.76284],
    [0.56727, 0.95545, 0.54039],
    [-0.20238, 1.1452, 0.26809],
    [-48.2991, 0.791669, 0.116226],
    [48.5833, 0.791459, 0.116479],
  ],
  slope: -0.053739,
  constant: 0.83433,
};
