/**
 * Molecules of a crystal completed across its symmetry: from the sites of the asymmetric unit to whole molecules.
 *
 * The first site stays where it is and its molecule grows over the bonds, into other cells and through operators where
 * need be; sites that were not reached begin the next molecule. Each symmetry-independent molecule results once.
 */
import { isMetal } from '../chemistry/elements.ts';
import { covalentRadius } from '../perception/covalent-radii.ts';
import { longestBond, OVERLAP_FRACTION } from '../perception/bonds-from-coordinates.ts';
import { multiply, type Matrix, type Vector } from './cell.ts';
import { applyOperator, compose, IDENTITY, type SymmetryOperator } from './operator.ts';

/** A site of the asymmetric unit, one alternative chosen. */
export interface Site {
  readonly element: number;
  readonly fractional: Vector;
  readonly occupancy: number;
  /** Disorder assembly and group; group 0 for ordered sites, negative where it is disordered about a special position. */
  readonly assembly: string;
  readonly group: number;
}

/** An atom of the completed molecules. */
export interface PlacedAtom {
  /** Index of its site. */
  readonly site: number;
  /** The operator, translations included, that makes it from its site. */
  readonly operator: SymmetryOperator;
  /** Å. */
  readonly position: Vector;
}

export interface Completion {
  /** Atoms as listed first, in the order of their sites; further images of sites after them. */
  readonly atoms: readonly PlacedAtom[];
  /** Two atoms a bond. */
  readonly pairs: readonly number[];
  /** Number of operators that leave each site where it is; 1 for a general position. */
  readonly siteSymmetry: readonly number[];
  /** Whether bonds run on through the crystal without end: those molecules are left as the file lists them. */
  readonly endless: boolean;
  /** Molecules that took images of their own sites to complete. */
  readonly completed: number;
}

/** Two images nearer than this, Å, are one atom on a special position. */
const SAME_PLACE = 0.1;
/** Two partly occupied sites of one element nearer than this, Å, are one place listed twice. */
const COINCIDENT = 0.25;
/** Images of a partly occupied site nearer than this, Å, are alternatives of each other. */
const ALTERNATIVE_REACH = 0.9;
/** Growth stops here. */
const MOST_ATOMS = 20_000;

interface Edge {
  readonly to: number;
  readonly operator: SymmetryOperator;
}

export function completeMolecules(
  sites: readonly Site[],
  operators: readonly SymmetryOperator[],
  toCartesian: Matrix,
): Completion {
  const finder = new EdgeFinder(sites, operators, toCartesian);
  const edges = finder.edges();
  const placed: PlacedAtom[] = [];
  const ofSite: number[][] = sites.map(() => []);
  let endless = false;
  let completed = 0;

  const positionOf = (site: number, operator: SymmetryOperator): [number, number, number] =>
    multiply(toCartesian, applyOperator(operator, sites[site]!.fractional));
  const partial = sites.map(({ occupancy }) => occupancy < 0.999);
  const find = (site: number, position: Vector): number => {
    const near = (index: number, reach: number): boolean => {
      const p = placed[index]!.position;
      return Math.hypot(p[0] - position[0], p[1] - position[1], p[2] - position[2]) < reach;
    };
    for (const index of ofSite[site]!) if (near(index, SAME_PLACE)) return index;
    if (!partial[site]) return -1;
    // Two partly occupied sites may list what symmetry makes of one.
    for (let other = 0; other < sites.length; other++) {
      if (!partial[other] || other === site || sites[other]!.element !== sites[site]!.element) continue;
      for (const index of ofSite[other]!) if (near(index, COINCIDENT)) return index;
    }
    return -1;
  };

  for (let seed = 0; seed < sites.length; seed++) {
    if (ofSite[seed]!.length > 0) continue;
    const first = placed.length;
    if (partial[seed] && find(seed, positionOf(seed, IDENTITY)) >= 0) continue;
    placed.push({ site: seed, operator: IDENTITY, position: positionOf(seed, IDENTITY) });
    ofSite[seed]!.push(first);
    let runsOn = false;
    for (let at = first; at < placed.length && !runsOn; at++) {
      const atom = placed[at]!;
      for (const edge of edges[atom.site]!) {
        const operator = compose(atom.operator, edge.operator);
        const position = positionOf(edge.to, operator);
        if (find(edge.to, position) >= 0) continue;
        // The same site turned the same way in another place: the structure repeats without end.
        const repeats = ofSite[edge.to]!.some(index => {
          const other = placed[index]!.operator;
          return other.rotation.every((value, k) => value === operator.rotation[k]);
        });
        if (repeats || placed.length >= MOST_ATOMS) {
          runsOn = true;
          break;
        }
        ofSite[edge.to]!.push(placed.length);
        placed.push({ site: edge.to, operator, position });
      }
    }
    if (runsOn) {
      endless = true;
      const members = new Set(placed.slice(first).map(({ site }) => site));
      for (const site of members) ofSite[site] = [];
      placed.length = first;
      for (const site of [...members].sort((a, b) => a - b)) {
        ofSite[site]!.push(placed.length);
        placed.push({ site, operator: IDENTITY, position: positionOf(site, IDENTITY) });
      }
    } else if (new Set(placed.slice(first).map(({ site }) => site)).size < placed.length - first) completed++;
  }

  const order = placed.map((_, index) => index);
  const rank = (index: number): number => ofSite[placed[index]!.site]!.indexOf(index);
  order.sort((a, b) => {
    const firstA = rank(a) === 0 ? 0 : 1;
    const firstB = rank(b) === 0 ? 0 : 1;
    return firstA - firstB || (firstA === 0 ? placed[a]!.site - placed[b]!.site : a - b);
  });
  const newIndex = new Int32Array(placed.length);
  order.forEach((old, index) => (newIndex[old] = index));
  const pairs: number[] = [];
  placed.forEach((atom, index) => {
    for (const edge of edges[atom.site]!) {
      const other = find(edge.to, positionOf(edge.to, compose(atom.operator, edge.operator)));
      if (other < 0 || other === index) continue;
      const [a, b] = [newIndex[index]!, newIndex[other]!];
      if (a < b) pairs.push(a, b);
    }
  });
  return {
    atoms: order.map(old => placed[old]!),
    pairs: uniquePairs(pairs),
    siteSymmetry: finder.siteSymmetry,
    endless,
    completed,
  };
}

function uniquePairs(pairs: readonly number[]): number[] {
  const seen = new Set<number>();
  const list: [number, number][] = [];
  for (let k = 0; k < pairs.length; k += 2) {
    const key = pairs[k]! * 2 ** 24 + pairs[k + 1]!;
    if (seen.has(key)) continue;
    seen.add(key);
    list.push([pairs[k]!, pairs[k + 1]!]);
  }
  list.sort((x, y) => x[0] - y[0] || x[1] - y[1]);
  return list.flat();
}

/** Finds all bonds of the sites, to sites of any cell. */
class EdgeFinder {
  readonly siteSymmetry: number[];
  private readonly sites: readonly Site[];
  private readonly operators: readonly SymmetryOperator[];
  private readonly m: Matrix;
  /** For each site, the operators by which it meets an alternative of itself. */
  private readonly meetsItself: Set<number>[];

  constructor(sites: readonly Site[], operators: readonly SymmetryOperator[], m: Matrix) {
    this.sites = sites;
    this.operators = operators;
    this.m = m;
    this.siteSymmetry = sites.map(() => 1);
    this.meetsItself = sites.map(() => new Set<number>());
  }

  edges(): Edge[][] {
    const { sites, operators, m } = this;
    const edges: Edge[][] = sites.map(() => []);
    let radius = 0;
    for (const { element } of sites) radius = Math.max(radius, covalentRadius(element));
    const reach = 2 * radius + 0.4;
    const span = this.spans(reach);
    const far = reach * reach;
    operators.forEach((operator, s) => {
      const images = sites.map(site => applyOperator(operator, site.fractional));
      sites.forEach((site, i) => {
        this.forTranslations(images[i]!, site.fractional, span, t => {
          const d = this.distance(images[i]!, t, site.fractional);
          if (d < SAME_PLACE && !(isIdentity(operator) && t.every(value => value === 0)))
            this.siteSymmetry[i]!++;
          else if (d >= SAME_PLACE && d < ALTERNATIVE_REACH && site.occupancy < 0.999)
            this.meetsItself[i]!.add(s);
        });
      });
      images.forEach((image, j) => {
        const to = sites[j]!;
        sites.forEach((from, i) => {
          const longest = longestBond(from.element, to.element);
          if (longest === 0) return;
          this.forTranslations(image, from.fractional, span, t => {
            const x = image[0] + t[0] - from.fractional[0];
            const y = image[1] + t[1] - from.fractional[1];
            const z = image[2] + t[2] - from.fractional[2];
            const dx = m[0]! * x + m[1]! * y + m[2]! * z;
            const dy = m[4]! * y + m[5]! * z;
            const dz = m[8]! * z;
            const squared = dx * dx + dy * dy + dz * dz;
            if (squared > far || squared > longest * longest) return;
            const shortest = OVERLAP_FRACTION * (covalentRadius(from.element) + covalentRadius(to.element));
            if (squared < shortest * shortest) return;
            const same = isIdentity(operator) && t.every(value => value === 0);
            if (!this.mayBond(i, j, s, same)) return;
            edges[i]!.push({
              to: j,
              operator: {
                rotation: operator.rotation,
                translation: [
                  operator.translation[0] + t[0],
                  operator.translation[1] + t[1],
                  operator.translation[2] + t[2],
                ],
              },
            });
          });
        });
      });
    });
    return this.hydrogensOnce(edges);
  }

  private mayBond(i: number, j: number, s: number, same: boolean): boolean {
    const a = this.sites[i]!;
    const b = this.sites[j]!;
    if (same) return a.group === 0 || b.group === 0 || a.assembly !== b.assembly || a.group === b.group;
    if (a.group < 0 && b.group < 0) return false;
    if (a.group !== 0 && b.group !== 0 && a.assembly === b.assembly) {
      return !this.meetsItself[i]!.has(s) && !this.meetsItself[j]!.has(s);
    }
    return true;
  }

  /** A hydrogen keeps its nearest partner, and nothing else keeps that hydrogen. */
  private hydrogensOnce(edges: readonly Edge[][]): Edge[][] {
    const { sites } = this;
    const nearest = edges.map((list, i) => {
      if (sites[i]!.element !== 1 || list.length === 0) return null;
      const best = list.reduce((x, y) => (this.cost(i, y) < this.cost(i, x) ? y : x));
      return { edge: best, to: best.to, cost: this.cost(i, best) };
    });
    return edges.map((list, i) => {
      const own = nearest[i];
      if (own) return [own.edge];
      return list.filter(edge => {
        const hydrogen = nearest[edge.to];
        if (!hydrogen) return true;
        const penalty = isMetal(sites[i]!.element) ? 10 : 0;
        return hydrogen.to === i && Math.abs(this.edgeLength(i, edge) + penalty - hydrogen.cost) < 1e-3;
      });
    });
  }

  private edgeLength(i: number, edge: Edge): number {
    const image = applyOperator(edge.operator, this.sites[edge.to]!.fractional);
    return this.distance(image, [0, 0, 0], this.sites[i]!.fractional);
  }

  private cost(i: number, edge: Edge): number {
    const to = this.sites[edge.to]!.element;
    return this.edgeLength(i, edge) + (to === 1 ? 20 : isMetal(to) ? 10 : 0);
  }

  private distance(image: Vector, t: Vector, from: Vector): number {
    const v = multiply(this.m, [
      image[0] + t[0] - from[0],
      image[1] + t[1] - from[1],
      image[2] + t[2] - from[2],
    ]);
    return Math.hypot(v[0], v[1], v[2]);
  }

  /** Reach in fractions of each axis: how far a sphere extends between the planes of the cell. */
  private spans(reach: number): Vector {
    const { m } = this;
    const det = m[0]! * m[4]! * m[8]!;
    const a = [m[0]!, 0, 0];
    const b = [m[1]!, m[4]!, 0];
    const c = [m[2]!, m[5]!, m[8]!];
    const area = (p: readonly number[], q: readonly number[]): number =>
      Math.hypot(p[1]! * q[2]! - p[2]! * q[1]!, p[2]! * q[0]! - p[0]! * q[2]!, p[0]! * q[1]! - p[1]! * q[0]!);
    return [(reach * area(b, c)) / det, (reach * area(c, a)) / det, (reach * area(a, b)) / det];
  }

  private forTranslations(image: Vector, from: Vector, span: Vector, call: (t: Vector) => void): void {
    const x0 = Math.ceil(from[0] - image[0] - span[0]);
    const x1 = Math.floor(from[0] - image[0] + span[0]);
    if (x0 > x1) return;
    const y0 = Math.ceil(from[1] - image[1] - span[1]);
    const y1 = Math.floor(from[1] - image[1] + span[1]);
    if (y0 > y1) return;
    const z0 = Math.ceil(from[2] - image[2] - span[2]);
    const z1 = Math.floor(from[2] - image[2] + span[2]);
    for (let x = x0; x <= x1; x++) {
      for (let y = y0; y <= y1; y++) {
        for (let z = z0; z <= z1; z++) call([x, y, z]);
      }
    }
  }
}

function isIdentity(operator: SymmetryOperator): boolean {
  return (
    operator.rotation.every((value, k) => value === (k % 4 === 0 ? 1 : 0)) &&
    operator.translation.every(value => value === 0)
  );
}
