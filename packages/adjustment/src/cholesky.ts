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

/** Solves Lᵀ x = y in place. */
export function solveUpperInPlace(lower: Float64Array, n: number, y: Float64Array): void {
  for (let i = n - 1; i >= 0; i--) {
    let sum = y[i];
    for (let k = i + 1; k < n; k++) sum -= lower[k * n + i] * y[k];
    y[i] = sum / lower[i * n + i];
  }
}
