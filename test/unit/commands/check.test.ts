import { readFileSync } from 'node:fs';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { halide } from './halide.ts';
import { Workplace } from './test-io.ts';

/** Seen from F: Cl, Br, H anticlockwise. */
const R = 'F[C@](Cl)(Br)[H]';

let place: Workplace;
beforeEach(() => {
  place = new Workplace();
});
afterEach(() => {
  place.remove();
});

describe('check', () => {
  it('prints one object a line for each entry, by the contract', async () => {
    place.write('poses.sdf', halide('one', 1) + halide('two', -1));
    const { status, lines } = await place.run(['check', 'poses.sdf', '--json']);
    expect(status).toBe(0);
    const [one, two] = lines();
    expect(one).toMatchObject({
      file: 'poses.sdf',
      entry: 1,
      name: 'one',
      formula: 'CHBrClF',
      atoms: 5,
      relation: null,
      error: null,
      units: [
        {
          kind: 'centre',
          atoms: [1],
          labels: ['C1'],
          descriptor: 'R',
          state: 'clear',
          ranking: [
            { atom: 2, rank: 1 },
            { atom: 3, rank: 2, decidedBy: '1a', sphere: 1 },
            { atom: 4, rank: 3, decidedBy: '1a', sphere: 1 },
            { atom: 5, rank: 4, decidedBy: '1a', sphere: 1 },
          ],
          sigma: null,
          torsion: null,
          intended: null,
          verdict: null,
        },
      ],
    });
    expect(one?.units[0]?.signedVolume).toBeLessThan(0);
    expect(two?.units[0]).toMatchObject({ descriptor: 'S' });
    expect(two?.units[0]?.signedVolume).toBeCloseTo(-one!.units[0]!.signedVolume!, 4);
  });

  it('sets every entry against one intention and exits with 1 when a unit is inverted', async () => {
    place.write('poses.sdf', halide('one', 1) + halide('two', -1) + halide('three', 0));
    const { status, lines, err } = await place.run(['check', 'poses.sdf', '--intended', R, '--json']);
    const relations = lines().map(({ relation }) => relation);
    const first = lines()[0]!.units[0]!;
    expect(new Set(relations.slice(0, 2))).toEqual(new Set(['same', 'enantiomer']));
    expect(first.verdict).toBe(first.intended === 'R' ? 'agrees' : 'inverted');
    expect(lines()[2]).toMatchObject({
      relation: 'undecided',
      units: [{ verdict: 'flat', descriptor: null }],
    });
    expect(status).toBe(1);
    expect(err).toMatch(/3 entries checked, 2 not as intended/);
  });

  it('takes descriptors typed on units', async () => {
    place.write('poses.sdf', halide('one', 1) + halide('two', -1));
    const { lines } = await place.run(['check', 'poses.sdf', '--intended', 'C1=R', '--json']);
    expect(lines().map(({ relation, units }) => [relation, units[0]?.intended, units[0]?.verdict])).toEqual([
      ['same', 'R', 'agrees'],
      ['enantiomer', 'R', 'inverted'],
    ]);
    const absent = await place.run(['check', 'poses.sdf', '--intended', 'C9=R', '--json']);
    expect(absent.status).toBe(1);
    expect(absent.lines()[0]).toMatchObject({
      relation: 'undecided',
      units: [{}, { verdict: 'missing', intended: 'R' }],
    });
  });

  it('takes an InChI, a drawing and another model as intention', async () => {
    place.write('poses.sdf', halide('one', 1) + halide('two', -1));
    // (R)-bromochlorofluoromethane; the parity was checked against rdkit.js.
    const inchi = await place.run([
      'check',
      'poses.sdf',
      '--intended',
      'InChI=1S/CHBrClF/c2-1(3)4/h1H/t1-/m0/s1',
      '--json',
    ]);
    expect(inchi.lines().map(({ relation }) => relation)).toEqual(['same', 'enantiomer']);
    place.write('model.sdf', halide('model', -1));
    const model = await place.run(['check', 'poses.sdf', '--intended', 'model.sdf', '--json']);
    expect(model.lines().map(({ relation }) => relation)).toEqual(['enantiomer', 'same']);
    // Drawn with Br up, F left and Cl right in the plane, H dashed away below: Br, Cl, F clockwise is R.
    place.write(
      'drawing.mol',
      [
        'drawing',
        '  test            2D',
        '',
        '  5  4  0  0  1  0  0  0  0  0999 V2000',
        '    0.0000    0.0000    0.0000 C   0  0',
        '    0.0000    1.0000    0.0000 Br  0  0',
        '    0.8700   -0.5000    0.0000 Cl  0  0',
        '   -0.8700   -0.5000    0.0000 F   0  0',
        '    0.1000   -1.0000    0.0000 H   0  0',
        '  1  2  1  0',
        '  1  3  1  0',
        '  1  4  1  0',
        '  1  5  1  6',
        'M  END',
        '',
      ].join('\n'),
    );
    const drawing = await place.run(['check', 'poses.sdf', '--intended', 'drawing.mol', '--json']);
    expect(drawing.lines().map(({ relation }) => relation)).toEqual(['same', 'enantiomer']);
  });

  it('matches intentions by name, by data item, and chooses none where several fit', async () => {
    place.write('poses.sdf', halide('one', 1).replace('one\n\n', 'A-1\n\n') + halide('two', -1));
    place.write('both.sdf', halide('A-1', 1) + halide('two', -1));
    const byName = await place.run(['check', 'poses.sdf', '--intended', 'both.sdf', '--json']);
    expect(byName.lines().map(({ relation, intention }) => [relation, intention])).toEqual([
      ['undecided', undefined],
      ['same', 'two'],
    ]);
    expect(byName.lines()[0]?.error?.code).toBe('ambiguous-intention');
    expect(byName.status).toBe(1);
    const byItem = await place.run([
      'check',
      'poses.sdf',
      '--intended',
      'both.sdf',
      '--json',
      '--match-by',
      'POSE',
    ]);
    expect(byItem.lines().map(({ relation, intention }) => [relation, intention])).toEqual([
      ['same', 'A-1'],
      ['same', 'two'],
    ]);
    expect(byItem.status).toBe(0);
  });

  it('says when no intention fits', async () => {
    place.write('poses.sdf', halide('one', 1));
    place.write('others.smi', 'C[C@H](N)O\tx\nC[C@@H](N)S\ty\n');
    const { status, lines } = await place.run(['check', 'poses.sdf', '--intended', 'others.smi', '--json']);
    expect(lines()[0]).toMatchObject({ relation: 'unmatched', error: null });
    expect(status).toBe(1);
  });

  it('keeps clean entries and their complement byte for byte', async () => {
    const one = halide('one', 1).replaceAll('\n', '\r\n');
    const two = halide('two', -1);
    const three = halide('three', 1);
    place.write('poses.sdf', one + two + three);
    const kept = [
      'check',
      'poses.sdf',
      '--intended',
      'C1=R',
      '--keep',
      'same',
      '-o',
      'clean.sdf',
      '--rest',
      'rest.sdf',
    ];
    expect((await place.run(kept)).status).toBe(1);
    expect(place.read('clean.sdf')).toBe(one + three);
    expect(place.read('rest.sdf')).toBe(two);
  });

  it('works as a filter from standard input to standard output', async () => {
    const entries = Array.from({ length: 150 }, (_, k) => halide(`p${k}`, k % 3 === 0 ? -1 : 1));
    const checked = await place.run(['check', '-', '--json'], { input: entries.join('') });
    expect(checked.lines().map(({ file, entry, name }) => [file, entry, name])).toEqual(
      entries.map((_, k) => ['-', k + 1, `p${k}`]),
    );
    const filtered = await place.run(['check', '-', '--intended', 'C1=R', '--keep', 'same', '-o', '-'], {
      input: entries.join(''),
    });
    expect(filtered.out).toBe(entries.filter((_, k) => k % 3 !== 0).join(''));
  });

  it('divides the entries among shards without loss', async () => {
    place.write('poses.sdf', Array.from({ length: 10 }, (_, k) => halide(`p${k}`, 1)).join(''));
    const seen: number[] = [];
    for (const shard of ['1/3', '2/3', '3/3']) {
      const { lines } = await place.run(['check', 'poses.sdf', '--json', '--shard', shard]);
      seen.push(...lines().map(({ entry }) => entry));
    }
    expect(seen.sort((a, b) => a - b)).toEqual([1, 2, 3, 4, 5, 6, 7, 8, 9, 10]);
  });

  it('goes on with an interrupted run, to the same lines, kept entries and summary', async () => {
    const entries = Array.from({ length: 200 }, (_, k) => halide(`p${k}`, k % 7 === 0 ? -1 : 1));
    place.write('poses.sdf', entries.join(''));
    const args = [
      'check',
      'poses.sdf',
      '--intended',
      'C1=R',
      '--lines',
      'out.jsonl',
      '--summary',
      'sum.json',
    ];
    await place.run([...args, '--keep', 'same', '-o', 'clean.sdf']);
    const whole = place.read('out.jsonl');
    const [clean, summary] = [place.read('clean.sdf'), place.read('sum.json')];
    // The run ended in the middle of a line.
    place.write('out.jsonl', whole.slice(0, Math.floor(whole.length * 0.4)));
    const again = await place.run([...args, '--keep', 'same', '-o', 'clean.sdf', '--resume']);
    expect(again.status).toBe(1);
    expect(place.read('out.jsonl')).toBe(whole);
    expect(place.read('clean.sdf')).toBe(clean);
    expect(place.read('sum.json')).toBe(summary);
  });

  it('checks a file of several models again as a whole when it goes on', async () => {
    const atom = (serial: number, name: string, x: number, y: number, z: number): string =>
      `HETATM${String(serial).padStart(5)} ${name.padEnd(4)} LIG A   1    ${[x, y, z].map(value => value.toFixed(3).padStart(8)).join('')}  1.00 10.00          ${name.replace(/\d/, '').toUpperCase().padStart(2)}`;
    const modelOf = (number: number, hand: 1 | -1): string[] => [
      `MODEL     ${String(number).padStart(4)}`,
      atom(1, 'C1', 0, 0, 0),
      atom(2, 'BR2', 1.83, 0, 0.64),
      atom(3, 'CL3', -0.83, -1.44 * hand, 0.58),
      atom(4, 'F4', -0.64, 1.1 * hand, 0.45),
      atom(5, 'H5', 0, 0, -1.09),
      'ENDMDL',
    ];
    place.write(
      'models.pdb',
      `${[...modelOf(1, 1), ...modelOf(2, -1), ...modelOf(3, 1), 'END'].join('\n')}\n`,
    );
    const args = ['check', 'models.pdb', '--intended', 'F[C@](Cl)(Br)[H]', '--lines', 'out.jsonl'];
    await place.run(args);
    const whole = place.read('out.jsonl');
    expect(
      whole
        .trim()
        .split('\n')
        .map(line => (JSON.parse(line) as { relation: string }).relation),
    ).toEqual(['same', 'enantiomer', 'same']);
    place.write('out.jsonl', whole.slice(0, whole.indexOf('\n') + 5));
    await place.run([...args, '--resume']);
    expect(place.read('out.jsonl')).toBe(whole);
  });

  it('ends in order when interrupted and leaves the old clean set alone', async () => {
    place.write('poses.sdf', Array.from({ length: 200 }, (_, k) => halide(`p${k}`, 1)).join(''));
    place.write('clean.sdf', 'as it was');
    const { status, err } = await place.run(
      ['check', 'poses.sdf', '--intended', 'C1=R', '--keep', 'same', '-o', 'clean.sdf'],
      { signal: AbortSignal.abort() },
    );
    expect(status).toBe(130);
    expect(err).toMatch(/interrupted/);
    expect(place.read('clean.sdf')).toBe('as it was');
  });

  it('sums up by compound, with the units that invert and the spread of firmness', async () => {
    place.write('poses.sdf', halide('one', 1) + halide('two', -1) + halide('three', 1));
    await place.run(['check', 'poses.sdf', '--intended', 'C1=R', '--summary', 'sum.json']);
    const [compound] = JSON.parse(place.read('sum.json')) as [Record<string, unknown>];
    expect(compound).toMatchObject({
      poses: 3,
      relations: { same: 2, enantiomer: 1 },
      units: [
        {
          unit: 'C1',
          verdicts: { agrees: 2, inverted: 1 },
          firmness: { median: expect.closeTo(1, 1) as number },
        },
      ],
    });
  });

  it('names the odd ones out of a compound when nothing was intended', async () => {
    place.write('poses.sdf', halide('one', 1) + halide('two', 1) + halide('odd', -1) + halide('three', 1));
    const { out, status } = await place.run(['check', 'poses.sdf', '--summary', '-']);
    expect(status).toBe(0);
    expect(out).toMatch(/2 configurations/);
    expect(out).toMatch(/odd ones out, 1: poses\.sdf 3 odd/);
  });
});

describe('bad input', () => {
  it.each([
    ['an empty file', 'bad.sdf', '', /bad\.sdf: the file is empty/],
    ['a binary file', 'bad.sdf', new Uint8Array(5000).map((_, i) => (i * 37) % 256), /bad\.sdf: .*binary/],
  ])('%s: exit 2, the file named', async (_, name, content, message) => {
    place.write(name, content);
    const { status, err } = await place.run(['check', name, '--json']);
    expect(status).toBe(2);
    expect(err).toMatch(message);
  });

  it('a file that is not there', async () => {
    place.write('good.sdf', halide('one', 1));
    expect((await place.run(['check', 'none.sdf'])).status).toBe(2);
    const { status, err, lines } = await place.run(['check', 'none.sdf', 'good.sdf', '--json']);
    expect(status).toBe(3);
    expect(err).toMatch(/none\.sdf: there is no such file/);
    expect(lines()).toHaveLength(1);
  });

  it.each([
    ['a truncated entry', (lines: string[]) => lines.splice(8), /promises 5 atoms and 4 bonds/],
    ['an unknown element', (lines: string[]) => (lines[5] = lines[5]!.replace('Br', 'Qq')), /Qq/],
    ['a bond to an atom that is not there', (lines: string[]) => (lines[9] = '  1  7  1  0'), /7/],
    ['NaN coordinates', (lines: string[]) => (lines[5] = lines[5]!.replace(/^.{10}/, '       NaN')), /NaN/],
  ])(
    '%s among good ones: named with entry and line, the others checked, exit 3',
    async (_, spoil, message) => {
      place.write('poses.sdf', halide('one', 1) + halide('bad', 1, spoil) + halide('three', -1));
      const { status, err, lines } = await place.run(['check', 'poses.sdf', '--json']);
      expect(lines().map(({ entry, units }) => [entry, units[0]?.descriptor ?? null])).toEqual([
        [1, 'R'],
        [2, null],
        [3, 'S'],
      ]);
      const { error } = lines()[1]!;
      expect(error?.message).toMatch(message);
      expect(error?.line).toBeGreaterThan(20);
      expect(err).toMatch(/^poses\.sdf, entry 2, line \d+: /m);
      expect(err).toMatch(/2 entries checked, 1 could not be read/);
      expect(status).toBe(3);
    },
  );

  it('all-zero coordinates: no letter, and the reason given', async () => {
    place.write(
      'poses.sdf',
      halide('zero', 1, lines => {
        for (let at = 4; at < 9; at++) lines[at] = `    0.0000    0.0000    0.0000${lines[at]!.slice(30)}`;
      }),
    );
    const { lines } = await place.run(['check', 'poses.sdf', '--json']);
    const [record] = lines();
    expect(record?.units.every(({ descriptor }) => descriptor === null)).toBe(true);
    const said = [record?.error?.message ?? '', ...(record?.warnings ?? [])].join(' ');
    expect(said).toMatch(/coordinates/);
  });

  it.each([
    [['check']],
    [['check', 'x.sdf', '--nonsense']],
    [['nonsense']],
    [[]],
    [['check', 'x.sdf', '--shard', '3/2']],
    [['check', 'x.sdf', '--jobs', '0']],
    [['check', 'x.sdf', '--keep', 'same', '-o', 'y.sdf']],
    [['check', 'x.sdf', '--intended', 'none.smi']],
    [['check', 'x.sdf', '--intended', 'C(C']],
  ])('unusable arguments %j: exit 2 and a message', async args => {
    const { status, err, out } = await place.run(args);
    expect(status).toBe(2);
    expect(err.length).toBeGreaterThan(10);
    expect(out).toBe('');
  });
});

describe('the demo', () => {
  const demo = (name: string): string =>
    readFileSync(new URL(`../../../assets/demo/${name}`, import.meta.url), 'utf8');

  it('shows one good model, one inverted, one nearly flat', async () => {
    place.write('models.sdf', demo('lantern-models.sdf'));
    place.write('intended.smi', demo('lantern-intended.smi'));
    const { status, lines, out } = await place.run([
      'check',
      'models.sdf',
      '--intended',
      'intended.smi',
      '--json',
    ]);
    expect(lines().map(({ relation }) => relation)).toEqual(['same', 'epimer', 'undecided']);
    expect(status).toBe(1);
    expect(out.split('\n')).toHaveLength(4);
    const text = await place.run(['check', 'models.sdf', '--intended', 'intended.smi']);
    expect(text.out).toMatch(/inverted/);
    expect(text.out).toMatch(/flat/);
  });
});

describe('explain', () => {
  it('shows the spheres, the first difference and the rule of each step', async () => {
    place.write('one.sdf', halide('one', 1));
    const { status, out } = await place.run(['explain', 'one.sdf', '--unit', 'C1']);
    expect(status).toBe(0);
    expect(out).toMatch(/C1, centre: R/);
    expect(out).toMatch(/Br2 before Cl3[^]*?Rule 1a, sphere 1/);
    const json = await place.run(['explain', 'one.sdf', '--unit', '1', '--json']);
    const record = JSON.parse(json.out) as { steps: { rule: string }[]; ranking: { label: string }[] };
    expect(record.ranking.map(({ label }) => label)).toEqual(['Br2', 'Cl3', 'F4', 'H5']);
    expect(record.steps.map(({ rule }) => rule)).toEqual(['1a', '1a', '1a']);
  });

  it.each([
    [['explain', 'one.sdf'], /--unit/],
    [['explain', 'one.sdf', '--unit', 'Br2'], /the units are C1/],
    [['explain', 'one.sdf', '--unit', 'C1', '--entry', '4'], /no entry 4/],
    [['explain', 'none.sdf', '--unit', 'C1'], /no such file/],
  ])('%j: exit 2, says what would be right', async (args, message) => {
    place.write('one.sdf', halide('one', 1));
    const { status, err } = await place.run(args);
    expect(status).toBe(2);
    expect(err).toMatch(message);
  });
});

describe('the command line', () => {
  it('tells its version and its help', async () => {
    expect((await place.run(['--version'])).out).toMatch(/^deasil \d+\.\d+\.\d+/);
    const { status, out } = await place.run(['--help']);
    expect(status).toBe(0);
    expect(out).toMatch(/check[\s\S]*explain/);
    expect((await place.run(['check', '--help'])).out).toMatch(/--intended/);
  });
});
