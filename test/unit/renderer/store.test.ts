/** The state of the window: history of judgements, sorting of the ledger, keys and commands, the session file. */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { COMMANDS, commandOn, findCommands, keysOf } from '../../../renderer/commands.ts';
import { ledgerRows, type LedgerQuery } from '../../../renderer/panels/ledger-order.ts';
import { parseSession, sessionText } from '../../../renderer/session-file.ts';
import { type Action, judgementOf, reduce, START, type State } from '../../../renderer/store.ts';
import type { Row } from '../../../renderer/worker/protocol.ts';

const judgement: fc.Arbitrary<Action> = fc.record({
  type: fc.constant('judge' as const),
  key: fc.constantFrom('a.sdf#1:2', 'a.sdf#1:4', 'a.sdf#2:7-8'),
  change: fc.oneof(
    fc.record({ mark: fc.constantFrom('accepted' as const, 'rejected' as const, 'question' as const, null) }),
    fc.record({ remark: fc.string() }),
  ),
});

const play = (actions: readonly Action[], from: State = START): State => actions.reduce(reduce, from);

describe('history', () => {
  test('undoing all that was done and redoing it gives the same judgements', () => {
    fc.assert(
      fc.property(fc.array(judgement, { maxLength: 40 }), actions => {
        const done = play(actions);
        const steps = done.past.length;
        const undone = play(
          Array.from({ length: steps }, () => ({ type: 'undo' }) as const),
          done,
        );
        expect(undone.present).toEqual(START.present);
        const redone = play(
          Array.from({ length: steps }, () => ({ type: 'redo' }) as const),
          undone,
        );
        expect(redone.present).toEqual(done.present);
      }),
    );
  });

  test('a judgement after an undo forgets what was undone', () => {
    const judge = (remark: string): Action => ({ type: 'judge', key: 'a#1:1', change: { remark } });
    const state = play([judge('one'), judge('two'), { type: 'undo' }, judge('three'), { type: 'redo' }]);
    expect(judgementOf(state, 'a#1:1').remark).toBe('three');
    expect(play([{ type: 'undo' }], state).present.judgements['a#1:1']?.remark).toBe('one');
  });
});

describe('the session file', () => {
  test('keeps every judgement', () => {
    fc.assert(
      fc.property(
        fc.dictionary(
          fc
            .tuple(
              fc.integer({ min: 1, max: 1e6 }),
              fc.array(fc.integer({ min: 1, max: 1e6 }), { minLength: 1, maxLength: 2 }),
            )
            .map(([entry, atoms]) => `poses #3:x.sdf#${entry}:${atoms.join('-')}`),
          fc.record({
            mark: fc.constantFrom('accepted' as const, 'rejected' as const, 'question' as const, null),
            remark: fc.string(),
          }),
        ),
        judgements => {
          expect(parseSession(sessionText('poses #3:x.sdf', judgements))).toEqual({ ...judgements });
        },
      ),
    );
  });

  test.each([
    '',
    '{',
    '[]',
    '{"deasilSession":2}',
    '{"deasilSession":1,"input":"a","judgements":[{"entry":0}]}',
  ])('refuses %j with a reason', text => {
    expect(() => parseSession(text)).toThrow(/session file beside the input/u);
  });
});

const row: fc.Arbitrary<Row> = fc.record({
  index: fc.nat({ max: 1000 }),
  file: fc.constant(0),
  entry: fc.nat({ max: 1000 }),
  line: fc.constant(1),
  name: fc.string(),
  formula: fc.constantFrom('C2H6O', 'C10H8', 'CH4'),
  atoms: fc.nat(),
  letters: fc.constantFrom('RS', 'R', '·'),
  names: fc.constantFrom('', 'C7 C9'),
  verdicts: fc.constantFrom('aa', 'i', 'f'),
  doubtful: fc.constantFrom('', 'C7'),
  firmness: fc.option(fc.double({ min: 0, max: 1, noNaN: true })),
  relation: fc.constantFrom('same' as const, 'epimer' as const, null),
  finding: fc.constantFrom(
    'none' as const,
    'inverted' as const,
    'flat' as const,
    'residue' as const,
    'error' as const,
  ),
  error: fc.constant(null),
});
const query: fc.Arbitrary<LedgerQuery> = fc.record({
  column: fc.constantFrom('entry', 'name', 'formula', 'letters', 'relation', 'finding', 'firmness'),
  descending: fc.boolean(),
  words: fc.constantFrom('', 'C10', 'inverted', 'c7 epimer'),
  doubtfulOnly: fc.boolean(),
});

describe('the ledger', () => {
  test('shows rows of the list only, each once, and leaves the list as it is', () => {
    fc.assert(
      fc.property(fc.uniqueArray(row, { selector: one => one.index }), query, (rows, asked) => {
        const before = [...rows];
        const shown = ledgerRows(rows, asked);
        expect(rows).toEqual(before);
        expect(new Set(shown).size).toBe(shown.length);
        expect(shown.every(one => rows.includes(one))).toBe(true);
        if (asked.words === '' && !asked.doubtfulOnly) expect(shown.length).toBe(rows.length);
      }),
    );
  });

  test('puts the inverted first by finding, and rows without a firmness last either way', () => {
    const make = (index: number, finding: Row['finding'], firmness: number | null): Row => ({
      ...fc.sample(row, { numRuns: 1, seed: 1 })[0]!,
      index,
      finding,
      firmness,
    });
    const rows = [make(0, 'none', null), make(1, 'flat', 0.1), make(2, 'inverted', 0.9)];
    const order = (column: LedgerQuery['column'], descending: boolean): number[] =>
      ledgerRows(rows, { column, descending, words: '', doubtfulOnly: false }).map(one => one.index);
    expect(order('finding', false)).toEqual([2, 1, 0]);
    expect(order('firmness', false)).toEqual([1, 2, 0]);
    expect(order('firmness', true)).toEqual([2, 1, 0]);
  });
});

describe('commands', () => {
  test('no two share a key or an id', () => {
    const keys = COMMANDS.map(({ keys }) => keys).filter(one => one !== null);
    expect(new Set(keys).size).toBe(keys.length);
    expect(new Set(COMMANDS.map(({ id }) => id)).size).toBe(COMMANDS.length);
  });

  test.each([
    [{ key: 'j' }, 'next-unit'],
    [{ key: 'J' }, 'next-unit'],
    [{ key: 'D', shiftKey: true }, 'next-doubtful-entry'],
    [{ key: 'z', ctrlKey: true }, 'undo'],
    [{ key: 'Z', ctrlKey: true, shiftKey: true }, 'redo'],
    [{ key: 'z', metaKey: true }, 'undo'],
    [{ key: 'ArrowRight', shiftKey: true }, 'next-atom'],
    [{ key: '+', shiftKey: true }, 'nearer'],
    [{ key: 'j', altKey: true }, null],
  ])('%j is %s', (event, id) => {
    const plain = { ctrlKey: false, metaKey: false, shiftKey: false, altKey: false };
    expect(commandOn(keysOf({ ...plain, ...event }))).toBe(id);
  });

  test('each is found by its own words', () => {
    for (const command of COMMANDS) expect(findCommands(command.label)).toContain(command);
    expect(findCommands('zzz')).toEqual([]);
    expect(findCommands('')).toEqual(COMMANDS);
  });
});
