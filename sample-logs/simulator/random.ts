/** Random numbers from a seed, the same on every machine: a 32-bit mixing generator and normal draws from it. */
export interface Random {
  /** Evenly from 0 to 1, 1 excluded. */
  readonly even: () => number
  /** Normal, mean 0, standard deviation 1 (Box-Muller). */
  readonly normal: () => number
}

export function seeded(seed: number): Random {
  let state = seed >>> 0
  const even = (): number => {
    state = (state + 0x6d2b79f5) >>> 0
    let mixed = Math.imul(state ^ (state >>> 15), state | 1)
    mixed ^= mixed + Math.imul(mixed ^ (mixed >>> 7), mixed | 61)
    return ((mixed ^ (mixed >>> 14)) >>> 0) / 4_294_967_296
  }
  const normal = (): number => Math.sqrt(-2 * Math.log(1 - even())) * Math.cos(2 * Math.PI * even())
  return { even, normal }
}
