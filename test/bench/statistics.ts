/** Repeated timings: median and spread. */

export interface Timing {
  /** Median over the rounds, in the unit that was measured. */
  readonly median: number;
  readonly least: number;
  readonly most: number;
}

export function timingOf(values: readonly number[]): Timing {
  const sorted = [...values].sort((a, b) => a - b);
  const middle = Math.floor(sorted.length / 2);
  const median = sorted.length % 2 === 1 ? sorted[middle]! : (sorted[middle - 1]! + sorted[middle]!) / 2;
  return { median, least: sorted[0]!, most: sorted[sorted.length - 1]! };
}

/** Runs tasks in turn, round after round, so that a slow moment of the machine falls on all alike; one round first to warm up. Milliseconds. */
export function timeInTurn<K extends string>(
  tasks: Readonly<Record<K, () => void>>,
  rounds: number,
): Record<K, Timing> {
  const names = Object.keys(tasks) as K[];
  const times = new Map<K, number[]>(names.map(name => [name, []]));
  for (let round = 0; round <= rounds; round++) {
    for (const name of names) {
      const started = performance.now();
      tasks[name]();
      if (round > 0) times.get(name)!.push(performance.now() - started);
    }
  }
  return Object.fromEntries(names.map(name => [name, timingOf(times.get(name)!)])) as Record<K, Timing>;
}

/** "12.3 µs (12.0 to 13.1)" for a time in milliseconds over a number of things. */
export function each(timing: Timing, count: number): string {
  const micro = (ms: number): string => ((1000 * ms) / count).toPrecision(3);
  return `${micro(timing.median)} µs (${micro(timing.least)} to ${micro(timing.most)})`;
}

/** "3.1 times faster", "1.4 times slower": the first against the second. */
export function ratio(first: Timing, second: Timing): string {
  const quotient = second.median / first.median;
  return quotient >= 1 ? `${quotient.toFixed(2)} times faster` : `${(1 / quotient).toFixed(2)} times slower`;
}
