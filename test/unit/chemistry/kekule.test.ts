/** Kekulé structures: the matching covers all that can be covered, checked against exhaustive search. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { type AromaticGraph, DoubleBondNeed, kekulise } from '../../../core/chemistry/kekule.ts';

/** Fewest required atoms left uncovered over all matchings, and fewest optional ones among those, by trying all. */
function exhaustive(graph: AromaticGraph): { required: number; optional: number } {
  const { edges, needs, atomCount } = graph;
  const covered = new Uint8Array(atomCount);
  let best = { required: Number.POSITIVE_INFINITY, optional: Number.POSITIVE_INFINITY };
  const visit = (e: number): void => {
    if (2 * e >= edges.length) {
      let required = 0;
      let optional = 0;
      for (let i = 0; i < atomCount; i++) {
        if (covered[i]) continue;
        if (needs[i] === DoubleBondNeed.required) required++;
        if (needs[i] === DoubleBondNeed.optional) optional++;
      }
      if (required < best.required || (required === best.required && optional < best.optional)) {
        best = { required, optional };
      }
      return;
    }
    visit(e + 1);
    const a = edges[2 * e]!;
    const b = edges[2 * e + 1]!;
    if (covered[a] || covered[b] || needs[a] === 0 || needs[b] === 0) return;
    covered[a] = covered[b] = 1;
    visit(e + 1);
    covered[a] = covered[b] = 0;
  };
  visit(0);
  return best;
}

const graphs = fc
  .record({
    needs: fc.array(fc.constantFrom(0, 1, 2, 2, 2), { minLength: 2, maxLength: 9 }),
    pairs: fc.array(fc.tuple(fc.nat(8), fc.nat(8)), { maxLength: 13 }),
  })
  .map(({ needs, pairs }) => {
    const seen = new Set<string>();
    const edges: number[] = [];
    for (const [a, b] of pairs) {
      const key = `${Math.min(a, b)}-${Math.max(a, b)}`;
      if (a === b || a >= needs.length || b >= needs.length || seen.has(key)) continue;
      seen.add(key);
      edges.push(a, b);
    }
    return {
      atomCount: needs.length,
      edges: Uint32Array.from(edges),
      needs: Uint8Array.from(needs),
      chains: true,
    };
  });

describe('kekulise', () => {
  it('leaves as few atoms uncovered as exhaustive search, in any graph', () => {
    fc.assert(
      fc.property(graphs, graph => {
        const { doubled, uncovered } = kekulise(graph);
        const covered = new Uint8Array(graph.atomCount);
        doubled.forEach((double, e) => {
          if (!double) return;
          for (const atom of [graph.edges[2 * e]!, graph.edges[2 * e + 1]!]) {
            expect(covered[atom]).toBe(0);
            expect(graph.needs[atom]).not.toBe(DoubleBondNeed.none);
            covered[atom] = 1;
          }
        });
        const best = exhaustive(graph);
        expect(uncovered.length).toBe(best.required);
        const optional = [...graph.needs].filter(
          (need, i) => need === DoubleBondNeed.optional && !covered[i],
        ).length;
        expect(optional).toBe(best.optional);
      }),
      { numRuns: 3000 },
    );
  });

  it('keeps the bond between two rings single where both rings allow it', () => {
    // Biphenylene: the four-membered ring could take both joining bonds as double bonds.
    const edges = [0, 1, 1, 2, 2, 3, 3, 4, 4, 5, 5, 0, 6, 7, 7, 8, 8, 9, 9, 10, 10, 11, 11, 6, 0, 6, 1, 7];
    for (let turn = 0; turn < edges.length / 2; turn++) {
      const turned = [...edges.slice(2 * turn), ...edges.slice(0, 2 * turn)];
      const { doubled, uncovered } = kekulise({
        atomCount: 12,
        edges: Uint32Array.from(turned),
        needs: new Uint8Array(12).fill(DoubleBondNeed.required),
        chains: false,
      });
      expect(uncovered).toEqual([]);
      doubled.forEach((double, e) => {
        const joins = turned[2 * e]! < 6 !== turned[2 * e + 1]! < 6;
        expect(double === 1 && joins).toBe(false);
      });
    }
  });

  it('names the atoms that no double bond reaches', () => {
    const { uncovered } = kekulise({
      atomCount: 5,
      edges: Uint32Array.of(0, 1, 1, 2, 2, 3, 3, 4, 4, 0),
      needs: new Uint8Array(5).fill(DoubleBondNeed.required),
      chains: false,
    });
    expect(uncovered).toHaveLength(1);
  });
});
