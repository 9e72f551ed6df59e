/** The syntax of CIF 1.1 and 2.0, and what is told of files that break it. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { measured, parseCif } from '../../../core/formats/cif-syntax.ts';

const first = (text: string) => {
  const document = parseCif(text);
  const block = document.blocks[0];
  if (!block) throw new Error('no block');
  return { document, block };
};

describe('CIF 1.1', () => {
  it('reads items, quotes, text fields, comments and unknown values', () => {
    const { block, document } = first(
      "# comment\nDATA_one # more\n_a 1.5(2)\n_b 'a dog's life'\n_c \"say \"it\"s\"\n_d ?\n_e .\n_f '.'\n_g\n;first\nsecond\n;\n_H#i x#y\n",
    );
    expect(block.name).toBe('one');
    expect(block.get('_a')).toBe('1.5(2)');
    expect(block.get('_b')).toBe("a dog's life");
    expect(block.get('_c')).toBe('say "it"s');
    expect(block.get('_d')).toBeNull();
    expect(block.get('_e')).toBeNull();
    expect(block.get('_f')).toBe('.');
    expect(block.get('_g')).toBe('first\nsecond');
    expect(block.get('_h#i')).toBe('x#y');
    expect(document.problems).toEqual([]);
  });

  it('reads loops row by row, with any line ending', () => {
    for (const ending of ['\n', '\r\n', '\r']) {
      const { block } = first(
        ['data_x', 'loop_', ' _l.A', ' _l.b', '1 2 3', "'4 4'", '_z 9', ''].join(ending),
      );
      expect(block.all('_l.a')).toEqual(['1', '3']);
      expect(block.all('_l.b')).toEqual(['2', '4 4']);
      expect(block.get('_z')).toBe('9');
      expect(block.looped.get('_l.a')?.lineOfRow(1)).toBe(5);
    }
  });

  it('joins folded lines and takes prefixes off text fields', () => {
    expect(first('data_x\n_a\n;\\\none \\\ntwo\nthree\n;\n').block.get('_a')).toBe('one two\nthree');
    expect(first('data_x\n_a\n;P>\\\nP>one\nP>;two\n;\n').block.get('_a')).toBe('one\n;two');
  });

  it('ignores save frames and keeps data blocks apart', () => {
    const { document } = first('data_a\nsave_f\n_x 1\nsave_\n_y 2\ndata_b\n_x 3\n');
    expect(document.blocks.map(block => block.name)).toEqual(['a', 'b']);
    expect(document.blocks[0]?.get('_x')).toBeNull();
    expect(document.blocks[0]?.get('_y')).toBe('2');
    expect(document.blocks[1]?.get('_x')).toBe('3');
  });
});

describe('CIF 2.0', () => {
  it('reads triple quotes, lists and tables as single values', () => {
    const { block, document } = first(
      "#\\#CIF_2.0\ndata_x\n_a '''it's\n'quoted' '''\n_b [1 [2 3] 'a]b']\n_c {\"k\":1}\n_d 'plain'\n",
    );
    expect(document.problems).toEqual([]);
    expect(block.get('_a')).toBe("it's\n'quoted' ");
    expect(block.get('_b')).toBe("[1 [2 3] 'a]b']");
    expect(block.get('_c')).toBe('{"k":1}');
    expect(block.get('_d')).toBe('plain');
  });
});

describe('broken files', () => {
  const problems = (text: string) =>
    parseCif(text).problems.map(({ line, message }) => `${line}: ${message}`);

  it.each([
    ["data_x\n_a 'open\n_b 2\n", /^2: the quoted string/u],
    ['data_x\n_a\n_b 2\n', /^2: _a has no value/u],
    ['data_x\n_a 1 2\n', /^2: a value without a data name/u],
    ['data_x\nloop_\n_a\n_b\n1 2 3\n', /^5: the loop of _a has 3 values in 2 columns/u],
    ['data_x\nloop_\n_a\n', /^2: the loop of _a has no values/u],
    ['data_x\n_a\n;never\nclosed\n', /^3: the text field/u],
    ['data_x\n_a 1\n_a 2\n', /^3: _a is given twice/u],
    ['data_x\nstop_\n', /^2: stop_/u],
    ["#\\#CIF_2.0\ndata_x\n_a '''open\n", /^3: the string/u],
    ['#\\#CIF_2.0\ndata_x\n_a [1 2\n', /^3: the list/u],
  ])('%j is told with its line', (text, expected) => {
    expect(problems(text)[0]).toMatch(expected);
  });

  it('lose only what is broken', () => {
    const { block } = first("data_x\n_a 'open\n_b 2\nloop_\n_c\n_d\n1 2 3\n_e 5\n");
    expect(block.get('_a')).toBe('open');
    expect(block.get('_b')).toBe('2');
    expect(block.all('_c')).toEqual(['1']);
    expect(block.looped.get('_c')?.broken).toBe(true);
    expect(block.get('_e')).toBe('5');
  });

  it('never end the reader, whatever the bytes', () => {
    fc.assert(
      fc.property(
        fc.array(
          fc.constantFrom(
            'data_a',
            'loop_',
            '_x',
            '_y',
            "'",
            '"',
            ';',
            '\n',
            ' ',
            '1',
            '#',
            '[',
            ']',
            '{',
            "'''",
          ),
          {
            maxLength: 60,
          },
        ),
        fc.boolean(),
        (parts, second) => {
          const document = parseCif((second ? '#\\#CIF_2.0\n' : '') + parts.join(''));
          for (const block of document.blocks) for (const name of block.items.keys()) block.get(name);
          expect(document.blocks.length).toBeGreaterThanOrEqual(0);
        },
      ),
    );
  });
});

describe('values written and read again', () => {
  it('come back whatever they hold', () => {
    const value = fc
      .string({
        unit: fc.constantFrom('a', 'b', '1', ' ', '.', '_', '#', ';', "'", '"', '$', '[', ']', '\n'),
      })
      .filter(text => !text.includes('\n;') && !text.endsWith('\\'));
    fc.assert(
      fc.property(value, fc.nat(2), (text, after) => {
        const { block } = first(`data_x\n_v\n;${text}\n;\n_w ${after}\n`);
        expect(block.get('_v')).toBe(text);
        expect(block.get('_w')).toBe(String(after));
      }),
    );
  });
});

describe('figures', () => {
  it.each([
    ['0.34443(14)', 0.34443, 0.00014],
    ['-.5(2)', -0.5, 0.2],
    ['12(3)', 12, 3],
    ['12.3(1.2)', 12.3, 1.2],
    ['1.25e3(4)', 1250, 40],
    ['+3.', 3, null],
    ['90', 90, null],
  ])('%s', (text, value, uncertainty) => {
    expect(measured(text)?.value).toBeCloseTo(value, 10);
    if (uncertainty === null) expect(measured(text)?.uncertainty).toBeNull();
    else expect(measured(text)?.uncertainty).toBeCloseTo(uncertainty, 10);
  });

  it.each(['', '.', '?', 'x', '1.2.3', '(3)', '1.2(x)', '--1'])('%j is none', text => {
    expect(measured(text)).toBeNull();
  });
});
