/** A pivot below this share of its diagonal means that rows depend on each other. Common practice. */
const LEAST_PIVOT_SHARE = 1e-11;

/**
 * Lower Cholesky factor of a symmetric positive definite matrix, in place (the strict upper part is left
 * as it was). Typed arrays, no allocation: it runs once per cell in local kriging.
 *
 * @param matrix - shape [n, n], row-major; may be longer than n * n
 * @returns false where the matrix is singular or not positive definite; its contents are then of no use
 */
export function choleskyInPlace(matrix: Float64Array, n: number): boolean {
  for (let i = 0; i < n; i++) {
    const rowI = i * n;
    for (let j = 0; j < i; j++) {
      const rowJ = j * n;
      let sum = matrix[rowI + j];
      for (let k = 0; k < j; k++) sum -= matrix[rowI + k] * matrix[rowJ + k];
      matrix[rowI + j] = sum / matrix[rowJ + j];
    }
    const diagonal = matrix[rowI + i];
    let pivot = diagonal;
    for (let k = 0; k < i; k++) pivot -= matrix[rowI + k] * matrix[rowI + k];
    if (!(pivot > LEAST_PIVOT_SHARE * diagonal)) return false;
    matrix[rowI + i] = Math.sqrt(pivot);
  }
  return true;
}

/** Solves L y = b in place; L as {@link choleskyInPlace} leaves it. */
export function solveLowerInPlace(lower: Float64Array, n: number, b: Float64Array): void {
  for (let i = 0; i < n; i++) {
    const row = i * n;
    let sum = b[i];
    for (let k = 0; k < i; k++) sum -= lower[row + k] * b[k];
    b[i] = sum / lower[row + i];
  }
}

/**
 * Solves L Y = B in place for many right-hand sides at once, four rows of Y at a time: several times faster than
 * one after the other.
 *
 * @param rows - shape [n, count], row-major; may be longer
 */
export function solveLowerRowsInPlace(
  lower: Float64Array,
  n: number,
  rows: Float64Array,
  count: number,
): void {
  for (let i = 0; i < n; i++) {
    const own = i * count;
    const row = i * n;
    let k = 0;
    for (; k + 3 < i; k += 4) {
      const l0 = lower[row + k];
      const l1 = lower[row + k + 1];
      const l2 = lower[row + k + 2];
      const l3 = lower[row + k + 3];
      const r0 = k * count;
      const r1 = r0 + count;
      const r2 = r1 + count;
      const r3 = r2 + count;
      for (let t = 0; t < count; t++) {
        rows[own + t] -= l0 * rows[r0 + t] + l1 * rows[r1 + t] + l2 * rows[r2 + t] + l3 * rows[r3 + t];
      }
    }
    for (; k < i; k++) {
      const l = lower[row + k];
      const at = k * count;
      for (let t = 0; t < count; t++) rows[own + t] -= l * rows[at + t];
    }
    const inverse = 1 / lower[row + i];
    for (let t = 0; t < count; t++) rows[own + t] *= inverse;
  }
}

/** Solves Lᵀ x = y in place. */
export function solveUpperInPlace(lower: Float64Array, n: number, y: Float64Array): void {
  for (let i = n - 1; i >= 0; i--) {
    let sum = y[i];
    for (let k = i + 1; k < n; k++) sum -= lower[k * n + i] * y[k];
    y[i] = sum / lower[i * n + i];
  }
}
