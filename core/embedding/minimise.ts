/** Limited-memory minimisation (L-BFGS: J. Nocedal, Math. Comput. 1980, 35, 773) in typed arrays, with a step limit. */

/** Value at `x`; writes the gradient to `g`, which comes in zeroed. */
export type Objective = (x: Float64Array, g: Float64Array) => number;

export interface MinimiseOptions {
  readonly iterations: number;
  /** Root mean square of the gradient at which the minimum is reached. */
  readonly gradient: number;
  /** Longest shift of one coordinate in one step. */
  readonly step: number;
  /** Stops once the value is below this. */
  readonly target?: number;
  /** Relative fall of the value over ten steps below which the search ends; 0 for none. */
  readonly stall?: number;
}

export interface MinimiseResult {
  readonly value: number;
  readonly converged: boolean;
  readonly iterations: number;
  readonly evaluations: number;
}

const MEMORY = 8;
const ARMIJO = 1e-4;
const LEAST_STEP = 1e-8;

/** Moves `x` to a nearby minimum. */
export function minimise(objective: Objective, x: Float64Array, options: MinimiseOptions): MinimiseResult {
  const n = x.length;
  const g = new Float64Array(n);
  const trial = new Float64Array(n);
  const trialGradient = new Float64Array(n);
  const direction = new Float64Array(n);
  const s = Array.from({ length: MEMORY }, () => new Float64Array(n));
  const y = Array.from({ length: MEMORY }, () => new Float64Array(n));
  const rho = new Float64Array(MEMORY);
  const alpha = new Float64Array(MEMORY);
  let kept = 0;
  let slot = 0;
  let value = objective(x, g);
  let evaluations = 1;
  let earlier = value;
  const target = options.target ?? Number.NEGATIVE_INFINITY;
  const limit = options.gradient * options.gradient * n;
  for (let iteration = 0; iteration < options.iterations; iteration++) {
    let square = 0;
    for (let i = 0; i < n; i++) square += g[i]! * g[i]!;
    if (square <= limit || value <= target)
      return { value, converged: true, iterations: iteration, evaluations };
    if (iteration % 10 === 9) {
      if (options.stall && earlier - value < options.stall * Math.max(1, Math.abs(value))) {
        return { value, converged: true, iterations: iteration, evaluations };
      }
      earlier = value;
    }
    // Two-loop recursion.
    for (let i = 0; i < n; i++) direction[i] = -g[i]!;
    for (let k = 1; k <= kept; k++) {
      const at = (slot - k + MEMORY) % MEMORY;
      const a = rho[at]! * dot(s[at]!, direction);
      alpha[at] = a;
      addScaled(direction, y[at]!, -a);
    }
    if (kept > 0) {
      const last = (slot - 1 + MEMORY) % MEMORY;
      const scale = 1 / (rho[last]! * dot(y[last]!, y[last]!));
      for (let i = 0; i < n; i++) direction[i]! *= scale;
    }
    for (let k = kept; k >= 1; k--) {
      const at = (slot - k + MEMORY) % MEMORY;
      addScaled(direction, s[at]!, alpha[at]! - rho[at]! * dot(y[at]!, direction));
    }
    let slope = dot(direction, g);
    if (!(slope < 0)) {
      kept = 0;
      for (let i = 0; i < n; i++) direction[i] = -g[i]!;
      slope = -square;
    }
    let longest = 0;
    for (let i = 0; i < n; i++) longest = Math.max(longest, Math.abs(direction[i]!));
    let step = longest > options.step ? options.step / longest : 1;
    if (kept === 0) step = Math.min(step, Math.min(options.step, 0.1) / Math.max(longest, 1e-12));
    let next = value;
    for (;;) {
      for (let i = 0; i < n; i++) trial[i] = x[i]! + step * direction[i]!;
      trialGradient.fill(0);
      next = objective(trial, trialGradient);
      evaluations++;
      if (next <= value + ARMIJO * step * slope) break;
      if (!Number.isFinite(next)) step *= 0.1;
      else {
        // Minimum of the parabola through both values and the slope.
        const parabola = (-slope * step * step) / (2 * (next - value - slope * step));
        step = Math.min(0.5 * step, Math.max(0.1 * step, parabola));
      }
      if (step * longest < LEAST_STEP) {
        if (kept === 0) return { value, converged: false, iterations: iteration, evaluations };
        break;
      }
    }
    if (step * longest < LEAST_STEP) {
      kept = 0;
      continue;
    }
    const sk = s[slot]!;
    const yk = y[slot]!;
    let curvature = 0;
    for (let i = 0; i < n; i++) {
      sk[i] = trial[i]! - x[i]!;
      yk[i] = trialGradient[i]! - g[i]!;
      curvature += sk[i]! * yk[i]!;
      x[i] = trial[i]!;
      g[i] = trialGradient[i]!;
    }
    value = next;
    if (curvature > 1e-10) {
      rho[slot] = 1 / curvature;
      slot = (slot + 1) % MEMORY;
      if (kept < MEMORY) kept++;
    }
  }
  return { value, converged: false, iterations: options.iterations, evaluations };
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}

function addScaled(a: Float64Array, b: Float64Array, factor: number): void {
  for (let i = 0; i < a.length; i++) a[i]! += factor * b[i]!;
}
