/**
 * The benchmarks, `npm run bench [-- name …]`: without names all of them, one after the other. They print times with their
 * spread and ratios against a witness of the same run; nothing is asserted.
 */

export type Benchmark = (report: (line: string) => void) => Promise<void>;

/** Loaded one by one, so that each runs in a process that has done nothing else before it but what it needs. */
const BENCHMARKS: Readonly<Record<string, () => Promise<{ readonly run: Benchmark }>>> = {
  labels: () => import('./labels.ts'),
  check: () => import('./check.ts'),
  embedding: () => import('./embedding.ts'),
};

const names = process.argv.slice(2);
const unknown = names.filter(name => !(name in BENCHMARKS));
if (unknown.length > 0) {
  process.stderr.write(
    `bench: ${unknown.join(', ')} unknown; there are ${Object.keys(BENCHMARKS).join(', ')}\n`,
  );
  process.exitCode = 2;
} else {
  for (const name of names.length > 0 ? names : Object.keys(BENCHMARKS)) {
    const { run } = await BENCHMARKS[name]!();
    await run(line => {
      process.stdout.write(`${line}\n`);
    });
  }
}
