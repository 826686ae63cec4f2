/**
 * Weighted least squares with a prior, by its normal equations: minimises Σ w (y − x·b)² + Σ p (b − b₀)².
 * A prior on every coefficient keeps the matrix positive definite whatever the data.
 */
export interface NormalEquations {
  readonly size: number;
  /** Row-major symmetric matrix; only the lower triangle is kept. */
  readonly matrix: Float64Array;
  readonly right: Float64Array;
}

export function normalEquations(prior: ArrayLike<number>, precision: ArrayLike<number>): NormalEquations {
  const size = prior.length;
  const matrix = new Float64Array(size * size);
  const right = new Float64Array(size);
  for (let i = 0; i < size; i += 1) {
    matrix[i * size + i] = precision[i];
    right[i] = precision[i] * prior[i];
  }
  return { size, matrix, right };
}

export function addRow(
  { size, matrix, right }: NormalEquations,
  x: ArrayLike<number>,
  y: number,
  weight: number,
): void {
  for (let i = 0; i < size; i += 1) {
    const wx = weight * x[i];
    if (wx === 0) continue;
    right[i] += wx * y;
    for (let j = 0; j <= i; j += 1) matrix[i * size + j] += wx * x[j];
  }
}

/** Solves by Cholesky factors; null when the matrix is not positive definite (a NaN included). */
export function solveNormal({ size, matrix, right }: NormalEquations): Float64Array | null {
  const low = factor(size, matrix);
  if (!low) return null;
  const x = Float64Array.from(right);
  for (let i = 0; i < size; i += 1) {
    for (let j = 0; j < i; j += 1) x[i] -= low[i * size + j] * x[j];
    x[i] /= low[i * size + i];
  }
  for (let i = size - 1; i >= 0; i -= 1) {
    for (let j = i + 1; j < size; j += 1) x[i] -= low[j * size + i] * x[j];
    x[i] /= low[i * size + i];
  }
  return x;
}

function factor(size: number, matrix: Float64Array): Float64Array | null {
  const low = Float64Array.from(matrix);
  for (let i = 0; i < size; i += 1) {
    for (let j = 0; j <= i; j += 1) {
      let sum = low[i * size + j];
      for (let k = 0; k < j; k += 1) sum -= low[i * size + k] * low[j * size + k];
      if (i === j && !(sum > 0)) return null;
      low[i * size + j] = i === j ? Math.sqrt(sum) : sum / low[j * size + j];
    }
  }
  return low;
}
