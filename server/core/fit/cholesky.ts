/** Dense Cholesky of a symmetric positive definite matrix, with solves and the diagonal of the inverse. */

/** First column of each row that is not zero: what lies left of it stays zero in the factor too. */
function envelope(a: Float64Array, n: number): Int32Array {
  const first = new Int32Array(n)
  for (let row = 0; row < n; row += 1) {
    let col = 0
    while (col < row && a[row * n + col] === 0) col += 1
    first[row] = col
  }
  return first
}

/**
 * Factors A = L Lᵀ in place: the lower triangle becomes L. O(n³/6); O(n b²) where nothing lies further than b from the
 * diagonal. Four columns at a time, so that a row is read once for four products.
 * @param a  n × n, row-major; only the lower triangle is read. Mutated.
 * @returns false where A is not positive definite; `a` is then in no useful state.
 */
export function factorInPlace(a: Float64Array, n: number): boolean {
  const first = envelope(a, n)
  for (let row = 0; row < n; row += 1) {
    const base = row * n
    const from = first[row]!
    let col = from
    for (; col + 3 < row; col += 4) {
      const c0 = col * n
      const c1 = c0 + n
      const c2 = c1 + n
      const c3 = c2 + n
      let s0 = a[base + col]!
      let s1 = a[base + col + 1]!
      let s2 = a[base + col + 2]!
      let s3 = a[base + col + 3]!
      const start = Math.max(from, Math.min(first[col]!, first[col + 1]!, first[col + 2]!, first[col + 3]!))
      for (let k = start; k < col; k += 1) {
        const own = a[base + k]!
        s0 -= own * a[c0 + k]!
        s1 -= own * a[c1 + k]!
        s2 -= own * a[c2 + k]!
        s3 -= own * a[c3 + k]!
      }
      s0 /= a[c0 + col]!
      s1 = (s1 - s0 * a[c1 + col]!) / a[c1 + col + 1]!
      s2 = (s2 - s0 * a[c2 + col]! - s1 * a[c2 + col + 1]!) / a[c2 + col + 2]!
      s3 = (s3 - s0 * a[c3 + col]! - s1 * a[c3 + col + 1]! - s2 * a[c3 + col + 2]!) / a[c3 + col + 3]!
      a[base + col] = s0
      a[base + col + 1] = s1
      a[base + col + 2] = s2
      a[base + col + 3] = s3
    }
    for (; col <= row; col += 1) {
      const other = col * n
      let sum = a[base + col]!
      for (let k = Math.max(from, first[col]!); k < col; k += 1) sum -= a[base + k]! * a[other + k]!
      if (row === col) {
        if (!(sum > 0)) return false
        a[base + row] = Math.sqrt(sum)
      } else a[base + col] = sum / a[other + col]!
    }
  }
  return true
}

/** L⁻¹ b. @param l  as left by `factorInPlace`. @param b  n long. Mutated: becomes the answer. O(n²/2). */
export function forwardInto(b: Float64Array, l: Float64Array, n: number): void {
  let from = 0
  while (from < n && b[from] === 0) from += 1
  for (let row = from; row < n; row += 1) {
    const base = row * n
    let sum = b[row]!
    for (let k = from; k < row; k += 1) sum -= l[base + k]! * b[k]!
    b[row] = sum / l[base + row]!
  }
}

/** Solves L Lᵀ x = b. @param l  as left by `factorInPlace`. @param b  n long. Mutated: becomes x. O(n²). */
export function solveInto(b: Float64Array, l: Float64Array, n: number): void {
  forwardInto(b, l, n)
  // By rows of L, so that memory is read in order: each solved entry is taken out of those before it.
  for (let row = n - 1; row >= 0; row -= 1) {
    const base = row * n
    const value = b[row]! / l[base + row]!
    b[row] = value
    for (let k = 0; k < row; k += 1) b[k]! -= l[base + k]! * value
  }
}

/**
 * Diagonal of (L Lᵀ)⁻¹: squared column norms of L⁻¹. O(n³/6). Four columns at a time: row i of L is read once for the
 * entries of row i of L⁻¹ in all of them.
 */
export function inverseDiagonal(l: Float64Array, n: number): Float64Array {
  const diagonal = new Float64Array(n)
  const columns = new Float64Array(4 * n)
  for (let j = 0; j < n; j += 4) {
    const width = Math.min(4, n - j)
    for (let row = j; row < n; row += 1) {
      let v0 = 0
      let v1 = 0
      let v2 = 0
      let v3 = 0
      const base = row * n
      for (let k = j; k < row; k += 1) {
        const own = l[base + k]!
        const at = 4 * k
        v0 -= own * columns[at]!
        v1 -= own * columns[at + 1]!
        v2 -= own * columns[at + 2]!
        v3 -= own * columns[at + 3]!
      }
      const pivot = l[base + row]!
      const at = 4 * row
      columns[at] = (row === j ? 1 : v0) / pivot
      columns[at + 1] = (row === j + 1 ? 1 : row > j + 1 ? v1 : 0) / pivot
      columns[at + 2] = (row === j + 2 ? 1 : row > j + 2 ? v2 : 0) / pivot
      columns[at + 3] = (row === j + 3 ? 1 : row > j + 3 ? v3 : 0) / pivot
      for (let c = 0; c < width; c += 1) diagonal[j + c]! += columns[at + c]! ** 2
    }
  }
  return diagonal
}
