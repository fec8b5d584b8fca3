/** Dense Cholesky of a symmetric positive definite matrix, with solves and the diagonal of the inverse. */

/**
 * Factors A = L Lᵀ in place: the lower triangle becomes L. O(n³/6).
 * @param a  n × n, row-major; only the lower triangle is read. Mutated.
 * @returns false where A is not positive definite; `a` is then in no useful state.
 */
export function factorInPlace(a: Float64Array, n: number): boolean {
  for (let row = 0; row < n; row += 1) {
    const base = row * n
    for (let col = 0; col <= row; col += 1) {
      const other = col * n
      let sum = a[base + col]!
      for (let k = 0; k < col; k += 1) sum -= a[base + k]! * a[other + k]!
      if (row === col) {
        if (!(sum > 0)) return false
        a[base + row] = Math.sqrt(sum)
      } else a[base + col] = sum / a[other + col]!
    }
  }
  return true
}

/** Solves L Lᵀ x = b. @param l  as left by `factorInPlace`. @param b  n long. Mutated: becomes x. O(n²). */
export function solveInto(b: Float64Array, l: Float64Array, n: number): void {
  for (let row = 0; row < n; row += 1) {
    let sum = b[row]!
    for (let k = 0; k < row; k += 1) sum -= l[row * n + k]! * b[k]!
    b[row] = sum / l[row * n + row]!
  }
  for (let row = n - 1; row >= 0; row -= 1) {
    let sum = b[row]!
    for (let k = row + 1; k < n; k += 1) sum -= l[k * n + row]! * b[k]!
    b[row] = sum / l[row * n + row]!
  }
}

/** Diagonal of (L Lᵀ)⁻¹: column norms of L⁻¹. O(n³/6). */
export function inverseDiagonal(l: Float64Array, n: number): Float64Array {
  const diagonal = new Float64Array(n)
  const column = new Float64Array(n)
  for (let j = 0; j < n; j += 1) {
    column.fill(0, 0, n)
    column[j] = 1 / l[j * n + j]!
    let sum = column[j]! * column[j]!
    for (let row = j + 1; row < n; row += 1) {
      let value = 0
      for (let k = j; k < row; k += 1) value -= l[row * n + k]! * column[k]!
      column[row] = value / l[row * n + row]!
      sum += column[row]! * column[row]!
    }
    diagonal[j] = sum
  }
  return diagonal
}
