import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { buildMolecule, type BondOrder } from '../../../core/chemistry/molecule.ts';
import { type Fragment, fragmentsOf } from '../../../core/comparison/fragment.ts';
import { firstIsomorphism, placements, planOf } from '../../../core/comparison/isomorphism.ts';
import { initialColours, refine, refineRounds, sameColours } from '../../../core/comparison/refinement.ts';
import { symmetryOf } from '../../../core/comparison/symmetry.ts';

type Edge = readonly [number, number];

/** A fragment of carbon and nitrogen with single bonds; connectedness comes from a spanning tree. */
function fragmentFrom(elements: readonly number[], edges: readonly Edge[]): Fragment {
  const bonds = edges.map(([a, b]): [number, number, BondOrder] => [a, b, 1]);
  const molecule = buildMolecule({ atoms: elements.map(element => ({ element })), bonds });
  return fragmentsOf(molecule).list[0]!;
}

const graph = fc
  .record({
    elements: fc.array(fc.constantFrom(6, 6, 7), { minLength: 2, maxLength: 7 }),
    parents: fc.array(fc.nat(), { minLength: 7, maxLength: 7 }),
    extra: fc.array(fc.tuple(fc.nat(), fc.nat()), { maxLength: 3 }),
  })
  .map(({ elements, parents, extra }) => {
    const n = elements.length;
    const edges = new Map<string, Edge>();
    const add = (a: number, b: number): void => {
      if (a !== b) edges.set(`${Math.min(a, b)} ${Math.max(a, b)}`, [a, b]);
    };
    for (let v = 1; v < n; v++) add(v, parents[v]! % v);
    for (const [a, b] of extra) add(a % n, b % n);
    return { elements, edges: [...edges.values()] };
  });

/** All automorphisms, by trying every permutation. */
function everyAutomorphism(fragment: Fragment): number[][] {
  const n = fragment.count;
  const linked = new Set<string>();
  for (let v = 0; v < n; v++) {
    for (let k = fragment.start[v]!; k < fragment.start[v + 1]!; k++)
      linked.add(`${v} ${fragment.adjacent[k]}`);
  }
  const found: number[][] = [];
  const image: number[] = [];
  const place = (v: number): void => {
    if (v === n) {
      found.push([...image]);
      return;
    }
    for (let w = 0; w < n; w++) {
      if (image.includes(w) || fragment.elements[w] !== fragment.elements[v]) continue;
      let fits = true;
      for (let u = 0; u < v; u++)
        if (linked.has(`${u} ${v}`) !== linked.has(`${image[u]} ${w}`)) fits = false;
      if (!fits) continue;
      image.push(w);
      place(v + 1);
      image.pop();
    }
  };
  place(0);
  return found;
}

describe('symmetry of a graph', () => {
  it('generates exactly the automorphisms, seen on the base', () => {
    fc.assert(
      fc.property(graph, fc.nat({ max: 7 }), ({ elements, edges }, size) => {
        const fragment = fragmentFrom(elements, edges);
        const { colours } = refine(fragment, initialColours(fragment, 'skeletal'));
        const base = Array.from({ length: Math.min(size, fragment.count) }, (_, v) => v);
        const { levels } = symmetryOf(fragment, colours, base);
        let images = new Set([base.join(' ')]);
        const walk = (depth: number, permutation: readonly number[]): void => {
          const level = levels[depth];
          if (!level) {
            images.add(base.map(v => permutation[v]).join(' '));
            return;
          }
          for (const element of level.elements)
            walk(
              depth + 1,
              Array.from(element, v => permutation[v]!),
            );
        };
        images = new Set();
        walk(
          0,
          Array.from({ length: fragment.count }, (_, v) => v),
        );
        const expected = new Set(everyAutomorphism(fragment).map(each => base.map(v => each[v]).join(' ')));
        expect(images).toEqual(expected);
      }),
      { numRuns: 300 },
    );
  });

  it('finds a graph again under any numbering', () => {
    fc.assert(
      fc.property(graph, fc.array(fc.nat(), { minLength: 7, maxLength: 7 }), ({ elements, edges }, swaps) => {
        const n = elements.length;
        const place = Array.from({ length: n }, (_, v) => v);
        for (let v = n - 1; v > 0; v--) {
          const w = swaps[v]! % (v + 1);
          [place[v], place[w]] = [place[w]!, place[v]!];
        }
        const moved: number[] = [];
        elements.forEach((element, v) => {
          moved[place[v]!] = element;
        });
        const first = fragmentFrom(elements, edges);
        const second = fragmentFrom(
          moved,
          edges.map(([a, b]): Edge => [place[a]!, place[b]!]),
        );
        const { colours, rounds } = refine(first, initialColours(first, 'skeletal'));
        const target = refineRounds(second, initialColours(second, 'skeletal'), rounds);
        expect(sameColours(colours, target)).toBe(true);
        const image = firstIsomorphism(first, planOf(first, colours), colours, second, target);
        expect(image).not.toBeNull();
        const bonds = new Set(
          edges.flatMap(([a, b]) => [`${place[a]} ${place[b]}`, `${place[b]} ${place[a]}`]),
        );
        for (const [a, b] of edges) expect(bonds.has(`${image![a]} ${image![b]}`)).toBe(true);
      }),
      { numRuns: 300 },
    );
  });

  it('does not pay for permutations that move nothing of the base', () => {
    // A centre with 40 arms of 3 leaves each: the group has 40! times 6 to the 40 elements.
    const elements = [6];
    const edges: Edge[] = [];
    for (let arm = 0; arm < 40; arm++) {
      const at = elements.push(6) - 1;
      edges.push([0, at]);
      for (let leaf = 0; leaf < 3; leaf++) edges.push([at, elements.push(7) - 1]);
    }
    const fragment = fragmentFrom(elements, edges);
    const { colours } = refine(fragment, initialColours(fragment, 'skeletal'));
    const { levels } = symmetryOf(fragment, colours, [0, 1]);
    expect(levels.map(level => level.elements.length)).toEqual([40]);
  });

  it('places part of a graph in every way there is', () => {
    const chain = fragmentFrom(
      [6, 6, 6],
      [
        [0, 1],
        [1, 2],
      ],
    );
    const ring = fragmentFrom(
      [6, 6, 6, 6, 6, 6],
      [
        [0, 1],
        [1, 2],
        [2, 3],
        [3, 4],
        [4, 5],
        [5, 0],
      ],
    );
    const pattern = initialColours(chain, 'skeletal');
    let count = 0;
    placements(chain, planOf(chain, pattern), pattern, ring, initialColours(ring, 'skeletal'), () => {
      count++;
      return false;
    });
    expect(count).toBe(12);
  });
});
