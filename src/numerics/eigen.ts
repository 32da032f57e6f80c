import { Matrix as Dense, EigenvalueDecomposition, SingularValueDecomposition } from 'ml-matrix';
import type { Matrix } from './matrix.ts';

/** Eigenvalues, ascending, and orthonormal eigenvectors of a symmetric matrix. */
export interface SymmetricEigen {
  /** n entries, ascending. */
  readonly values: Float64Array;
  /** n × n, column j belongs to `values[j]`. */
  readonly vectors: Matrix;
}

/** Eigenvalues of a general real matrix, with vectors in real form. */
export interface GeneralEigen {
  readonly real: Float64Array;
  readonly imaginary: Float64Array;
  /**
   * n × n: column j for a real eigenvalue; for a conjugate pair j, j + 1 (positive imaginary part first) the real part
   * in column j and the imaginary part in column j + 1. Not normalised.
   */
  readonly vectors: Matrix;
}

/** `M = U diag(values) Vᵀ`, values descending. */
export interface SingularValues {
  readonly values: Float64Array;
  /** rows × min(rows, cols). */
  readonly U: Matrix;
  /** cols × min(rows, cols). */
  readonly V: Matrix;
}

/** The symmetric eigenproblem `S V = V Λ`; only the lower triangle is read. @throws RangeError when an entry is not finite. */
export function decomposeSymmetric(S: Matrix): SymmetricEigen {
  const dense = toDense(S);
  for (let i = 0; i < S.rows; i++) for (let j = 0; j < i; j++) dense.set(j, i, dense.get(i, j));
  const evd = new EigenvalueDecomposition(dense, { assumeSymmetric: true });
  return { values: Float64Array.from(evd.realEigenvalues), vectors: fromDense(evd.eigenvectorMatrix) };
}

/** The eigenproblem of a general square matrix. @throws RangeError when an entry is not finite. */
export function decomposeGeneral(A: Matrix): GeneralEigen {
  if (A.rows === 0) return { real: new Float64Array(0), imaginary: new Float64Array(0), vectors: A };
  const evd = new EigenvalueDecomposition(toDense(A), { assumeSymmetric: false });
  return {
    real: Float64Array.from(evd.realEigenvalues),
    imaginary: Float64Array.from(evd.imaginaryEigenvalues),
    vectors: fromDense(evd.eigenvectorMatrix),
  };
}

/** The singular value decomposition. @throws RangeError when an entry is not finite. */
export function decomposeSingular(M: Matrix): SingularValues {
  const svd = new SingularValueDecomposition(toDense(M), { autoTranspose: true });
  return {
    values: Float64Array.from(svd.diagonal),
    U: fromDense(svd.leftSingularVectors),
    V: fromDense(svd.rightSingularVectors),
  };
}

/** Singular values alone, descending. @throws RangeError when an entry is not finite. */
export function singularValues(M: Matrix): Float64Array {
  if (M.rows === 0 || M.cols === 0) return new Float64Array(0);
  const options = {
    autoTranspose: true,
    computeLeftSingularVectors: false,
    computeRightSingularVectors: false,
  };
  return Float64Array.from(new SingularValueDecomposition(toDense(M), options).diagonal);
}

/** The decompositions do not end on a NaN: it is refused here. */
function toDense(M: Matrix): Dense {
  for (const value of M.data) {
    if (!Number.isFinite(value)) throw new RangeError(`a matrix to decompose holds ${value}`);
  }
  return Dense.from1DArray(M.rows, M.cols, Array.from(M.data));
}

function fromDense(D: Dense): Matrix {
  return { rows: D.rows, cols: D.columns, data: Float64Array.from(D.to1DArray()) };
}
