/** Search for mappings between two coloured graphs: whole on whole, or one wholly inside the other. */
import { areAdjacent, type Fragment } from './fragment.ts';

/** Most placements tried before a search gives up; molecules need a few times their atom count. */
export const PLACEMENT_LIMIT = 500_000;

/** The order in which a pattern is placed: each node but the first of a component hangs on an earlier one. */
export interface Plan {
  readonly order: Int32Array;
  /** Node placed earlier that is a neighbour, -1 for none. */
  readonly parent: Int32Array;
}

/** Plans the placement of a pattern, the rarest colours first. */
export function planOf(fragment: Fragment, colours: Int32Array): Plan {
  const { count, start, adjacent } = fragment;
  const frequency = new Map<number, number>();
  for (const colour of colours) frequency.set(colour, (frequency.get(colour) ?? 0) + 1);
  const order = new Int32Array(count);
  const parent = new Int32Array(count).fill(-1);
  const placed = new Uint8Array(count);
  let filled = 0;
  while (filled < count) {
    let seed = -1;
    let rarest = Number.POSITIVE_INFINITY;
    for (let v = 0; v < count; v++) {
      if (placed[v]) continue;
      const times = frequency.get(colours[v]!) ?? 0;
      if (times < rarest) {
        rarest = times;
        seed = v;
      }
    }
    placed[seed] = 1;
    let head = filled;
    order[filled++] = seed;
    for (; head < filled; head++) {
      const v = order[head]!;
      for (let k = start[v]!; k < start[v + 1]!; k++) {
        const w = adjacent[k]!;
        if (placed[w]) continue;
        placed[w] = 1;
        parent[w] = v;
        order[filled++] = w;
      }
    }
  }
  return { order, parent };
}

/**
 * Places every node of a pattern on a node of a target of the same colour so that neighbours stay neighbours, and
 * calls `visit` with the image of each node for every way found (the array is reused); `visit` returns true to stop.
 *
 * On graphs with as many edges the mappings are the isomorphisms. The result is false when the limit was reached.
 */
export function placements(
  pattern: Fragment,
  plan: Plan,
  patternColours: Int32Array,
  target: Fragment,
  targetColours: Int32Array,
  visit: (image: Int32Array) => boolean,
  limit = PLACEMENT_LIMIT,
): boolean {
  const n = pattern.count;
  const image = new Int32Array(n).fill(-1);
  const used = new Uint8Array(target.count);
  /** Next candidate to try at each depth: an index into the neighbours of the parent's image, or a node. */
  const cursor = new Int32Array(n);
  if (n === 0) return true;
  let depth = 0;
  let tried = 0;
  const { order, parent } = plan;
  const open = (at: number): void => {
    const p = parent[order[at]!]!;
    cursor[at] = p === -1 ? 0 : target.start[image[p]!]!;
  };
  open(0);
  while (depth >= 0) {
    const v = order[depth]!;
    const p = parent[v]!;
    const end = p === -1 ? target.count : target.start[image[p]! + 1]!;
    if (image[v] !== -1) {
      used[image[v]!] = 0;
      image[v] = -1;
    }
    let found = -1;
    for (let c = cursor[depth]!; c < end; c++) {
      const w = p === -1 ? c : target.adjacent[c]!;
      if (used[w] || targetColours[w] !== patternColours[v]) continue;
      if (++tried > limit) return false;
      let fits = true;
      for (let k = pattern.start[v]!; k < pattern.start[v + 1]!; k++) {
        const x = image[pattern.adjacent[k]!]!;
        if (x !== -1 && !areAdjacent(target, x, w)) {
          fits = false;
          break;
        }
      }
      if (!fits) continue;
      found = w;
      cursor[depth] = c + 1;
      break;
    }
    if (found === -1) {
      depth--;
      continue;
    }
    image[v] = found;
    used[found] = 1;
    if (depth === n - 1) {
      if (visit(image)) return true;
      continue;
    }
    depth++;
    open(depth);
  }
  return true;
}

/** One isomorphism from pattern to target, or null. */
export function firstIsomorphism(
  pattern: Fragment,
  plan: Plan,
  patternColours: Int32Array,
  target: Fragment,
  targetColours: Int32Array,
): Int32Array | null {
  if (pattern.count !== target.count || pattern.adjacent.length !== target.adjacent.length) return null;
  let result: Int32Array | null = null;
  placements(pattern, plan, patternColours, target, targetColours, image => {
    result = image.slice();
    return true;
  });
  return result;
}
