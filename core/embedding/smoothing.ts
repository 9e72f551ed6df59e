/** Triangle smoothing of distance bounds (G. M. Crippen and T. F. Havel, Distance Geometry and Molecular Conformation, 1988, ch. 5). */

/** Bounds of all distances in Å, n × n each, symmetric. */
export interface Bounds {
  readonly n: number;
  readonly lower: Float64Array;
  readonly upper: Float64Array;
}

/** Makes the bounds agree with the triangle inequalities; where a lower bound exceeds its upper one by less than `slack`, it yields. Returns the pair that contradicts, or null. */
export function smooth(bounds: Bounds, slack: number): readonly [number, number] | null {
  const { n, lower, upper } = bounds;
  for (let k = 0; k < n; k++) {
    const rowK = k * n;
    for (let i = 0; i < n; i++) {
      if (i === k) continue;
      const rowI = i * n;
      const uik = upper[rowI + k]!;
      const lik = lower[rowI + k]!;
      for (let j = 0; j < i; j++) {
        if (j === k) continue;
        const ujk = upper[rowK + j]!;
        const sum = uik + ujk;
        let u = upper[rowI + j]!;
        if (sum < u) {
          u = sum;
          upper[rowI + j] = sum;
          upper[j * n + i] = sum;
        }
        const first = lik - ujk;
        const second = lower[rowK + j]! - uik;
        const best = first > second ? first : second;
        let l = lower[rowI + j]!;
        if (best > l) {
          l = best;
          lower[rowI + j] = best;
          lower[j * n + i] = best;
        }
        if (l > u) {
          if (l - u > slack * u) return [j, i];
          lower[rowI + j] = u;
          lower[j * n + i] = u;
        }
      }
    }
  }
  return null;
}
