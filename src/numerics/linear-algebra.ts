/**
 * Small dense symmetric systems for the hot loops: row-major, in place, without allocation.
 *
 * Cholesky's factorisation A = L·Lᵀ, see Golub and Van Loan, Matrix Computations, 4th ed. (2013), section 4.2.
 * For general matrices and for accuracy on ill-conditioned ones use linear-fit.ts (QR) instead.
 */

/** Row scales of {@link invertSymmetric}, kept so that the hot loops allocate nothing. */
let scratch = new Float64Array(8);

/**
 * Factors a symmetric positive-definite matrix in place: the lower triangle of `a` becomes L; the upper one is
 * neither read nor written.
 *
 * @param a n×n, row-major
 * @returns false where the matrix is not positive definite (or holds a NaN); `a` is then spoilt
 */
export function factorCholesky(a: Float64Array, n: number): boolean {
  for (let j = 0; j < n; j++) {
    const row = j * n;
    let pivot = a[row + j]!;
    for (let k = 0; k < j; k++) pivot -= a[row + k]! * a[row + k]!;
    if (!(pivot > 0) || pivot === Number.POSITIVE_INFINITY) return false;
    const root = Math.sqrt(pivot);
    a[row + j] = root;
    for (let i = j + 1; i < n; i++) {
      let sum = a[i * n + j]!;
      for (let k = 0; k < j; k++) sum -= a[i * n + k]! * a[row + k]!;
      a[i * n + j] = sum / root;
    }
  }
  return true;
}

/**
 * Solves L·Lᵀ·x = b in place, with L from {@link factorCholesky}.
 *
 * @param l n×n, row-major, lower triangle
 * @param b length n, becomes x
 */
export function solveFactored(l: Float64Array, n: number, b: Float64Array): void {
  for (let i = 0; i < n; i++) {
    let sum = b[i]!;
    for (let k = 0; k < i; k++) sum -= l[i * n + k]! * b[k]!;
    b[i] = sum / l[i * n + i]!;
  }
  for (let i = n - 1; i >= 0; i--) {
    let sum = b[i]!;
    for (let k = i + 1; k < n; k++) sum -= l[k * n + i]! * b[k]!;
    b[i] = sum / l[i * n + i]!;
  }
}

/**
 * Solves A·x = b in place for a symmetric positive-definite A.
 *
 * @param a n×n, row-major; its lower triangle becomes L
 * @param b length n, becomes x
 * @returns false where A is not positive definite; `b` is then as it was
 */
export function solveSymmetric(a: Float64Array, n: number, b: Float64Array): boolean {
  if (!factorCholesky(a, n)) return false;
  solveFactored(a, n, b);
  return true;
}

/**
 * Inverts a symmetric positive-definite matrix in place.
 *
 * Only the lower triangle is read; the inverse is written to both. The matrix is first brought to a unit diagonal,
 * so rows in very different units (photons beside µm²) cost no digits and cannot overflow.
 *
 * @param a n×n, row-major, becomes its inverse
 * @returns false where the matrix is not positive definite; `a` is then spoilt
 */
export function invertSymmetric(a: Float64Array, n: number): boolean {
  if (scratch.length < n) scratch = new Float64Array(n);
  const scale = scratch;
  for (let i = 0; i < n; i++) {
    const diagonal = a[i * n + i]!;
    if (!(diagonal > 0) || diagonal === Number.POSITIVE_INFINITY) return false;
    scale[i] = 1 / Math.sqrt(diagonal);
  }
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) a[i * n + j]! *= scale[i]! * scale[j]!;
    a[i * n + i] = 1;
  }
  if (!factorCholesky(a, n)) return false;
  invertLower(a, n);
  multiplyTransposed(a, n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const value = a[i * n + j]! * scale[i]! * scale[j]!;
      a[i * n + j] = value;
      a[j * n + i] = value;
    }
  }
  return true;
}

/** L becomes L⁻¹ (lower triangle, in place). */
function invertLower(l: Float64Array, n: number): void {
  for (let j = 0; j < n; j++) {
    l[j * n + j] = 1 / l[j * n + j]!;
    for (let i = j + 1; i < n; i++) {
      let sum = 0;
      for (let k = j; k < i; k++) sum -= l[i * n + k]! * l[k * n + j]!;
      l[i * n + j] = sum / l[i * n + i]!;
    }
  }
}

/** The lower triangle M becomes that of MᵀM, in place: entry (i, j) needs only rows from i down. */
function multiplyTransposed(m: Float64Array, n: number): void {
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = 0;
      for (let k = i; k < n; k++) sum += m[k * n + i]! * m[k * n + j]!;
      m[i * n + j] = sum;
    }
  }
}
