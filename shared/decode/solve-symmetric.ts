/**
 * Solves A·x = b for a small symmetric positive definite matrix by Cholesky's factorisation.
 *
 * @param matrix row by row, `size × size`; only the lower triangle is read; overwritten
 * @param right the right side, `size`; overwritten with the answer, which is also returned
 *
 * @example solveSymmetric(Float64Array.of(4, 2, 2, 3), Float64Array.of(8, 7)) // [1.25, 1.5]
 */
export function solveSymmetric(matrix: Float64Array, right: Float64Array): Float64Array {
  const size = right.length;
  const at = (row: number, column: number): number => matrix[row * size + column] as number;
  for (let column = 0; column < size; column += 1) {
    let pivot = at(column, column);
    for (let k = 0; k < column; k += 1) pivot -= at(column, k) ** 2;
    // A pivot that rounding made zero or negative belongs to a value the data say nothing about: it is held at zero.
    const root = pivot > 1e-12 ? Math.sqrt(pivot) : Number.POSITIVE_INFINITY;
    matrix[column * size + column] = root;
    for (let row = column + 1; row < size; row += 1) {
      let sum = at(row, column);
      for (let k = 0; k < column; k += 1) sum -= at(row, k) * at(column, k);
      matrix[row * size + column] = sum / root;
    }
  }
  for (let row = 0; row < size; row += 1) {
    let sum = right[row] as number;
    for (let k = 0; k < row; k += 1) sum -= at(row, k) * (right[k] as number);
    right[row] = sum / at(row, row);
  }
  for (let row = size - 1; row >= 0; row -= 1) {
    let sum = right[row] as number;
    for (let k = row + 1; k < size; k += 1) sum -= at(k, row) * (right[k] as number);
    right[row] = sum / at(row, row);
  }
  return right;
}
