/**
 * Bond orders, charges and missing hydrogens from geometry and valence, where a file gives positions only.
 *
 * Groups that are known by their shape come first (carboxylates, nitro groups, sulfones, phosphates, nitriles, azides …);
 * then every flat three-coordinate carbon takes part in one double bond: the shortest bonds first, the rest by a
 * matching, so that a Kekulé structure results wherever there is one. What the geometry leaves open is marked doubtful.
 *
 * Bond lengths are rounded means of F. H. Allen et al., J. Chem. Soc. Perkin Trans. 2 1987, S1; the thresholds between
 * them are ours.
 */
import { isMetal } from '../chemistry/elements.ts';
import { perfectMatching } from '../chemistry/kekule.ts';
import { defaultHydrogens } from '../chemistry/valence.ts';

export interface OrderSearch {
  readonly elements: Uint8Array;
  /** Å, three an atom. */
  readonly coordinates: Float64Array;
  /** Two atoms a bond. */
  readonly pairs: Uint32Array;
  /** 1 for atoms whose bonds, charge and hydrogens are known already (residue templates): they are left alone. */
  readonly fixed?: Uint8Array | null;
  /** Orders of the bonds between fixed atoms; the others are ignored. */
  readonly knownOrders?: Uint8Array | null;
}

export interface FoundOrders {
  readonly orders: Uint8Array;
  readonly charges: Int8Array;
  /** Hydrogens that the model lacks. */
  readonly hydrogens: Uint8Array;
  readonly doubtful: Uint8Array;
}

/** Single and double bond lengths, Å, by the two atomic numbers in ascending order. */
const LENGTHS: ReadonlyMap<number, readonly [number, number]> = new Map([
  [606, [1.53, 1.33]],
  [607, [1.47, 1.27]],
  [608, [1.43, 1.21]],
  [616, [1.82, 1.62]],
  [615, [1.83, 1.66]],
  [634, [1.96, 1.79]],
  [707, [1.43, 1.24]],
  [708, [1.41, 1.21]],
  [716, [1.67, 1.53]],
  [715, [1.68, 1.57]],
  [1515, [2.22, 2.03]],
]);

/** Sum of the three angles above which an atom counts as flat (328.4° tetrahedral, 360° flat). */
const FLAT_ANGLES = 346;
/** Sums of angles between these decide, but are marked doubtful. */
const DOUBTFUL_ANGLES: readonly [number, number] = [340, 352];
/** Angle above which two bonds count as one line. */
const LINEAR_ANGLE = 158;
/** Angle above which a two-coordinate carbon without its hydrogens may be flat (109.5° tetrahedral, 120° flat). */
const OPEN_ANGLE = 115;
/** Score (0 double, 1 single) below which a bond is double whatever the angles. */
const CLEARLY_DOUBLE = 0.25;
/** Largest mean torsion of a flat ring of five or six, degrees. */
const FLAT_RING_TORSION = 12;

/** Finds orders, charges and missing hydrogens. */
export function bondOrders(search: OrderSearch): FoundOrders {
  return new OrderFinder(search).find();
}

class OrderFinder {
  private readonly z: Uint8Array;
  private readonly r: Float64Array;
  private readonly pairs: Uint32Array;
  private readonly fixed: Uint8Array;
  private readonly n: number;
  private readonly start: Uint32Array;
  private readonly to: Uint32Array;
  private readonly bond: Uint32Array;
  private readonly orders: Uint8Array;
  private readonly charges: Int8Array;
  private readonly hydrogens: Uint8Array;
  private readonly doubtful: Uint8Array;
  /** π bonds an atom has so far. */
  private readonly pi: Uint8Array;
  /** Whether hydrogens on carbon, and on other atoms, are among the atoms of its component. */
  private readonly carbonHydrogens: Uint8Array;
  private readonly polarHydrogens: Uint8Array;
  private readonly flat: Uint8Array;
  /** O, S, N ends that stay single and negative where hydrogens are listed. */
  private readonly anionic: Uint8Array;
  private readonly settled: Uint8Array;

  constructor(search: OrderSearch) {
    this.z = search.elements;
    this.r = search.coordinates;
    this.pairs = search.pairs;
    const n = search.elements.length;
    this.n = n;
    this.fixed = search.fixed ?? new Uint8Array(n);
    const count = search.pairs.length / 2;
    this.start = new Uint32Array(n + 1);
    for (const atom of search.pairs) this.start[atom + 1]!++;
    for (let i = 0; i < n; i++) this.start[i + 1]! += this.start[i]!;
    const fill = this.start.slice(0, n);
    this.to = new Uint32Array(2 * count);
    this.bond = new Uint32Array(2 * count);
    this.orders = new Uint8Array(count);
    for (let b = 0; b < count; b++) {
      const i = search.pairs[2 * b]!;
      const j = search.pairs[2 * b + 1]!;
      this.to[fill[i]!] = j;
      this.bond[fill[i]!++] = b;
      this.to[fill[j]!] = i;
      this.bond[fill[j]!++] = b;
      const known = this.fixed[i] && this.fixed[j] ? search.knownOrders?.[b] : undefined;
      this.orders[b] = known ?? (isMetal(this.z[i]!) || isMetal(this.z[j]!) ? 0 : 1);
    }
    this.charges = new Int8Array(n);
    this.hydrogens = new Uint8Array(n);
    this.doubtful = new Uint8Array(n);
    this.pi = new Uint8Array(n);
    this.carbonHydrogens = new Uint8Array(n);
    this.polarHydrogens = new Uint8Array(n);
    this.flat = new Uint8Array(n);
    this.anionic = new Uint8Array(n);
    this.settled = new Uint8Array(n);
  }

  find(): FoundOrders {
    this.findHydrogens();
    for (let i = 0; i < this.n; i++) if (this.open(i)) this.flat[i] = this.isFlat(i) ? 1 : 0;
    this.flattenRings();
    for (let i = 0; i < this.n; i++) if (this.open(i)) this.metalBonds(i);
    for (let i = 0; i < this.n; i++) if (this.open(i)) this.linearGroups(i);
    for (let i = 0; i < this.n; i++) if (this.open(i)) this.oxoGroups(i);
    for (let i = 0; i < this.n; i++) if (this.open(i)) this.carbonylLike(i);
    this.matchRest();
    this.complete();
    return {
      orders: this.orders,
      charges: this.charges,
      hydrogens: this.hydrogens,
      doubtful: this.doubtful,
    };
  }

  private open(i: number): boolean {
    return this.fixed[i] === 0 && this.z[i]! > 1;
  }

  /** Neighbours that are no metals. */
  private partners(i: number): number[] {
    const list: number[] = [];
    for (let k = this.start[i]!; k < this.start[i + 1]!; k++) {
      if (!isMetal(this.z[this.to[k]!]!)) list.push(this.to[k]!);
    }
    return list;
  }

  private hasMetal(i: number): boolean {
    for (let k = this.start[i]!; k < this.start[i + 1]!; k++) if (isMetal(this.z[this.to[k]!]!)) return true;
    return false;
  }

  private bondOf(i: number, j: number): number {
    for (let k = this.start[i]!; k < this.start[i + 1]!; k++) if (this.to[k] === j) return this.bond[k]!;
    return -1;
  }

  private length(i: number, j: number): number {
    const { r } = this;
    return Math.hypot(r[3 * i]! - r[3 * j]!, r[3 * i + 1]! - r[3 * j + 1]!, r[3 * i + 2]! - r[3 * j + 2]!);
  }

  /** Angle a–i–b, degrees. */
  private angle(a: number, i: number, b: number): number {
    const { r } = this;
    let dot = 0;
    for (let x = 0; x < 3; x++) dot += (r[3 * a + x]! - r[3 * i + x]!) * (r[3 * b + x]! - r[3 * i + x]!);
    const cosine = dot / (this.length(a, i) * this.length(b, i));
    return (180 / Math.PI) * Math.acos(Math.max(-1, Math.min(1, cosine)));
  }

  /** 0 at the double-bond length, 1 at the single-bond length; infinite for pairs that form no double bonds here. */
  private score(i: number, j: number): number {
    const low = Math.min(this.z[i]!, this.z[j]!);
    const high = Math.max(this.z[i]!, this.z[j]!);
    const lengths = LENGTHS.get(100 * low + high);
    if (!lengths) return Infinity;
    return (this.length(i, j) - lengths[1]) / (lengths[0] - lengths[1]);
  }

  private findHydrogens(): void {
    const seen = new Uint8Array(this.n);
    let anywhere = false;
    for (let root = 0; root < this.n; root++) {
      if (seen[root] || this.fixed[root]) continue;
      const members = [root];
      seen[root] = 1;
      let carbon = 0;
      let polar = 0;
      for (let at = 0; at < members.length; at++) {
        const i = members[at]!;
        for (let k = this.start[i]!; k < this.start[i + 1]!; k++) {
          const j = this.to[k]!;
          if (this.z[j] === 1 && this.z[i] === 6) carbon++;
          if (this.z[j] === 1 && this.z[i] !== 6) polar++;
          if (seen[j] || this.fixed[j]) continue;
          seen[j] = 1;
          members.push(j);
        }
      }
      for (const i of members) {
        this.carbonHydrogens[i] = carbon > 0 ? 1 : 0;
        this.polarHydrogens[i] = carbon > 0 || polar > 0 ? 1 : 0;
      }
      if (carbon > 0) anywhere = true;
    }
    // Where hydrogens on carbon are listed at all, ions without any have none.
    if (anywhere) for (let i = 0; i < this.n; i++) if (!this.fixed[i]) this.polarHydrogens[i] = 1;
  }

  private isFlat(i: number): boolean {
    const p = this.partners(i);
    if (p.length === 3) {
      const sum = this.angle(p[0]!, i, p[1]!) + this.angle(p[1]!, i, p[2]!) + this.angle(p[2]!, i, p[0]!);
      if (this.z[i] === 6 && sum > DOUBTFUL_ANGLES[0] && sum < DOUBTFUL_ANGLES[1]) this.doubtful[i] = 1;
      return sum > FLAT_ANGLES;
    }
    if (p.length === 2) {
      const angle = this.angle(p[0]!, i, p[1]!);
      if (this.z[i] !== 6) return angle > 100;
      // With its hydrogens listed, a two-coordinate carbon is linear or lacks one.
      if (!p.some(j => this.z[j] === 6 || this.z[j] === 7 || this.z[j] === 8 || this.z[j] === 16))
        return false;
      const best = Math.min(this.score(i, p[0]!), this.score(i, p[1]!));
      return best < CLEARLY_DOUBLE || (angle > OPEN_ANGLE && best < 0.62);
    }
    if (p.length === 1) return this.score(i, p[0]!) < 0.5;
    return false;
  }

  /** Marks two-coordinate carbons in flat rings of five and six as flat: their angle does not tell. */
  private flattenRings(): void {
    const path: number[] = [];
    const visit = (root: number, at: number): void => {
      for (let k = this.start[at]!; k < this.start[at + 1]!; k++) {
        const j = this.to[k]!;
        if (j === root && path.length >= 5) {
          this.judgeRing(path);
          continue;
        }
        if (
          j < root ||
          path.length >= 6 ||
          path.includes(j) ||
          this.fixed[j] ||
          isMetal(this.z[j]!) ||
          this.z[j] === 1
        )
          continue;
        path.push(j);
        visit(root, j);
        path.pop();
      }
    };
    for (let root = 0; root < this.n; root++) {
      if (!this.open(root) || isMetal(this.z[root]!) || this.partners(root).length < 2) continue;
      path.length = 0;
      path.push(root);
      visit(root, root);
    }
  }

  private judgeRing(ring: readonly number[]): void {
    const size = ring.length;
    if (ring[1]! > ring[size - 1]!) return;
    if (!ring.some(i => this.z[i] === 6 && !this.flat[i] && this.partners(i).length === 2)) return;
    let total = 0;
    let length = 0;
    for (let k = 0; k < size; k++) {
      const [a, b, c, d] = [0, 1, 2, 3].map(step => ring[(k + step) % size]!) as [
        number,
        number,
        number,
        number,
      ];
      total += Math.abs(this.torsion(a, b, c, d));
      length += Math.min(1.2, Math.max(0, this.score(a, b) === Infinity ? 0.5 : this.score(a, b)));
    }
    if (total / size > FLAT_RING_TORSION || length / size > 0.72) return;
    for (const i of ring) {
      if (this.z[i] === 6 && this.partners(i).length === 2 && !this.carbonHydrogens[i]) this.flat[i] = 1;
    }
  }

  private torsion(a: number, b: number, c: number, d: number): number {
    const { r } = this;
    const v = (p: number, q: number): [number, number, number] => [
      r[3 * q]! - r[3 * p]!,
      r[3 * q + 1]! - r[3 * p + 1]!,
      r[3 * q + 2]! - r[3 * p + 2]!,
    ];
    const cross = (p: readonly number[], q: readonly number[]): [number, number, number] => [
      p[1]! * q[2]! - p[2]! * q[1]!,
      p[2]! * q[0]! - p[0]! * q[2]!,
      p[0]! * q[1]! - p[1]! * q[0]!,
    ];
    const dot = (p: readonly number[], q: readonly number[]): number =>
      p[0]! * q[0]! + p[1]! * q[1]! + p[2]! * q[2]!;
    const b2 = v(b, c);
    const m = cross(v(a, b), b2);
    const n = cross(b2, v(c, d));
    return (180 / Math.PI) * Math.atan2(Math.hypot(...b2) * dot(v(a, b), n), dot(m, n));
  }

  private set(i: number, j: number, order: number): void {
    const b = this.bondOf(i, j);
    if (b < 0) return;
    const before = this.orders[b]!;
    this.orders[b] = order;
    this.pi[i]! += order - before;
    this.pi[j]! += order - before;
    this.settled[i] = 1;
    this.settled[j] = 1;
  }

  /** A σ bond from a carbon that is not flat to a metal counts as one; all others to metals have no localised order. */
  private metalBonds(i: number): void {
    if (this.z[i] !== 6 || this.flat[i]) return;
    let metals = 0;
    let bond = -1;
    for (let k = this.start[i]!; k < this.start[i + 1]!; k++) {
      if (!isMetal(this.z[this.to[k]!]!)) continue;
      metals++;
      bond = this.bond[k]!;
    }
    if (metals === 1 && this.partners(i).length === 3) this.orders[bond] = 1;
  }

  private linearGroups(i: number): void {
    const { z } = this;
    const p = this.partners(i);
    if (z[i] === 6 && p.length === 1 && this.pi[i] === 0 && !this.carbonHydrogens[i]) {
      const j = p[0]!;
      // Carbon monoxide, cyanide and acetylide ends.
      const length = this.length(i, j);
      if (z[j] === 8 && length < 1.19 && this.partners(j).length === 1) {
        this.set(i, j, 3);
        this.charges[i] = -1;
        this.charges[j] = 1;
      } else if (z[j] === 7 && length < 1.22) this.set(i, j, 3);
    }
    if (p.length !== 2 || (z[i] !== 6 && z[i] !== 7)) return;
    const [a, b] = p as [number, number];
    if (this.fixed[a] || this.fixed[b] || this.angle(a, i, b) < LINEAR_ANGLE) return;
    if (z[i] === 6 && this.pi[i] === 1) {
      // A cumulene goes on.
      const next = this.orders[this.bondOf(i, a)] === 2 ? b : a;
      if (this.score(i, next) < 0.45 && this.pi[next]! < 2 && (z[next] !== 8 || this.pi[next] === 0))
        this.set(i, next, 2);
      return;
    }
    if (this.pi[i]! > 0) return;
    if (z[i] === 7) {
      // Azide, diazo (charges on the ends), isonitrile.
      const ends = [a, b].sort((x, y) => this.length(i, x) - this.length(i, y)) as [number, number];
      const other = ends[1];
      if (z[ends[0]] === 7 && this.partners(ends[0]).length === 1) {
        if (this.score(i, other) < 0.75 && (z[other] === 7 || z[other] === 6)) {
          this.set(i, ends[0], 2);
          this.set(i, other, 2);
          this.charges[i] = 1;
          this.charges[ends[0]] = -1;
        } else {
          this.set(i, ends[0], 3);
          this.charges[i] = 1;
        }
      } else if (z[ends[0]] === 6 && this.partners(ends[0]).length === 1) {
        this.set(i, ends[0], 3);
        this.charges[i] = 1;
        this.charges[ends[0]] = -1;
      }
      return;
    }
    const triple = (j: number): boolean => {
      if (this.pi[j]! > 0) return false;
      const length = this.length(i, j);
      const q = this.partners(j);
      if (z[j] === 7) return q.length === 1 && length < 1.22;
      if (z[j] !== 6 || length > 1.28) return false;
      // Between two short bonds it is the middle of a cumulene.
      const beyond = p.find(other => other !== j)!;
      if (z[beyond] === 6 && this.score(i, beyond) < CLEARLY_DOUBLE) return false;
      return q.length === 1 || (q.length === 2 && this.angle(q[0]!, j, q[1]!) > LINEAR_ANGLE);
    };
    // The shorter bond first.
    const order = [a, b].sort((x, y) => this.length(i, x) - this.length(i, y));
    for (const j of order) {
      if (!triple(j)) continue;
      this.set(i, j, 3);
      return;
    }
    // Cumulated double bonds: allenes, ketenes, isocyanates, isothiocyanates, carbodiimides, carbon dioxide.
    if (this.score(i, a) < 0.45 && this.score(i, b) < 0.45 && this.pi[a] === 0 && this.pi[b] === 0) {
      this.set(i, a, 2);
      this.set(i, b, 2);
    }
  }

  /** Terminal partners of one element (no other partner but metals), nearest first. */
  private ends(i: number, element: number): number[] {
    return this.partners(i)
      .filter(j => this.z[j] === element && !this.fixed[j] && this.partners(j).length === 1)
      .sort((a, b) => this.length(i, a) - this.length(i, b));
  }

  private oxoGroups(i: number): void {
    const z = this.z[i]!;
    if (z !== 7 && z !== 15 && z !== 16 && z !== 17 && z !== 33 && z !== 34 && z !== 35 && z !== 53) return;
    const p = this.partners(i);
    const oxygens = this.ends(i, 8);
    if (oxygens.length === 0 && z !== 15) return;
    const free = oxygens.filter(o => this.pi[o] === 0);
    const anion = (list: readonly number[]): void => {
      for (const o of list) this.anionic[o] = 1;
    };
    if (z === 7) {
      if (p.length === 2 && free.length >= 1) {
        this.set(i, free[0]!, 2);
        if (free.length === 2) anion(free.slice(1));
      } else if (p.length === 3 && free.length >= 2) {
        this.set(i, free[0]!, 2);
        this.charges[i] = 1;
        for (const o of free.slice(1)) this.charges[o] = -1;
      } else if (
        p.length >= 3 &&
        free.length === 1 &&
        this.length(i, free[0]!) < 1.38 &&
        !this.hydroxy(free[0]!)
      ) {
        // Amine and imine oxides, nitrones: the nitrogen of a flat one takes its double bond in the matching.
        if (p.length === 4 || (this.flat[i] && this.length(i, free[0]!) < 1.34)) {
          this.charges[i] = 1;
          this.charges[free[0]!] = -1;
        }
      }
      return;
    }
    let doubles = 0;
    if (z === 15 || z === 33) doubles = p.length === 4 ? 1 : 0;
    else if (z === 16 || z === 34) doubles = p.length === 4 ? 2 : p.length === 3 ? 1 : 0;
    else doubles = free.length > 1 ? free.length - 1 : 0;
    const limit = z === 16 ? 1.56 : z === 15 ? 1.57 : z === 17 ? 1.5 : 1.75;
    let used = 0;
    for (const o of free) {
      if (used < doubles && (this.length(i, o) < limit || (used === 0 && free.length > 1))) {
        this.set(i, o, 2);
        used++;
      } else if (!this.hydroxy(o)) this.anionic[o] = 1;
    }
    if (z === 15 && used === 0 && p.length === 4) {
      const sulfur = this.ends(i, 16).filter(s => this.length(i, s) < 2.02);
      const selenium = this.ends(i, 34).filter(s => this.length(i, s) < 2.17);
      const partner = sulfur[0] ?? selenium[0];
      if (partner !== undefined) {
        this.set(i, partner, 2);
        anion(sulfur.slice(1));
      } else this.charges[i] = 1;
    }
  }

  private hydroxy(o: number): boolean {
    for (let k = this.start[o]!; k < this.start[o + 1]!; k++) if (this.z[this.to[k]!] === 1) return true;
    return false;
  }

  /** C=O, C=S, C=N ends of flat carbons: the shortest end takes the double bond; a second oxygen makes an acid. */
  private carbonylLike(i: number): void {
    if (this.z[i] !== 6 || !this.flat[i] || this.pi[i]! > 0) return;
    const oxygens = this.ends(i, 8).filter(o => !this.hydroxy(o) && this.pi[o] === 0);
    const sulfurs = this.ends(i, 16).filter(s => this.score(i, s) < 0.55 && !this.hydroxy(s));
    const first = oxygens[0];
    if (
      first !== undefined &&
      (this.score(i, first) < 0.55 || (oxygens.length >= 2 && this.score(i, first) < 0.75))
    ) {
      this.set(i, first, 2);
      for (const o of oxygens.slice(1)) this.anionic[o] = 1;
      return;
    }
    if (sulfurs[0] !== undefined) {
      this.set(i, sulfurs[0], 2);
      for (const s of sulfurs.slice(1)) this.anionic[s] = 1;
    }
  }

  /** Double bonds among what is left, shortest bonds first. */
  private matchRest(): void {
    const need = new Uint8Array(this.n);
    const late = new Uint8Array(this.n);
    for (let i = 0; i < this.n; i++) {
      if (!this.open(i) || this.pi[i]! > 0) continue;
      const p = this.partners(i);
      const z = this.z[i]!;
      if (z === 6 && this.flat[i] && p.length <= 3) need[i] = 2;
      else if (z === 7) {
        const oxide = this.charges[i] === 1 && p.length === 3;
        if (oxide) need[i] = 2;
        else if (this.charges[i] === 0 && this.unsaturatedNitrogen(i, p)) {
          // Hydrogens are listed and this nitrogen has none.
          need[i] = 2;
        } else if (this.charges[i] === 0 && p.length <= 2) need[i] = 1;
        else if (this.charges[i] === 0 && p.length === 3 && this.flat[i]) late[i] = 1;
      } else if (z === 8 && p.length === 1 && !this.anionic[i] && this.charges[i] === 0) need[i] = 1;
      else if (z === 16 && p.length === 1 && !this.anionic[i]) need[i] = 1;
      else if (z === 15 && p.length === 2) need[i] = 1;
    }
    const edges: { i: number; j: number; score: number }[] = [];
    const gather = (allowed: (i: number) => boolean): void => {
      edges.length = 0;
      for (let b = 0; 2 * b < this.pairs.length; b++) {
        const i = this.pairs[2 * b]!;
        const j = this.pairs[2 * b + 1]!;
        if (this.orders[b] !== 1 || this.pi[i]! > 0 || this.pi[j]! > 0 || !allowed(i) || !allowed(j))
          continue;
        const score = this.score(i, j);
        // Neither two hetero ends nor a bond as long as a single one.
        if (score > 1.05 || (need[i] !== 2 && need[j] !== 2 && score > 0.5)) continue;
        edges.push({ i, j, score });
      }
      edges.sort((x, y) => x.score - y.score || x.i - y.i || x.j - y.j);
    };
    gather(i => need[i]! > 0);
    this.commitClear(edges);
    // Amidinium, pyridinium and their kin: a flat three-coordinate nitrogen takes part where nothing else can.
    gather(i => need[i]! > 0 || late[i] === 1);
    const partner = matchRequired(this.n, need, edges);
    for (let i = 0; i < this.n; i++) {
      const j = partner[i]!;
      if (j > i) this.set(i, j, 2);
    }
  }

  private unsaturatedNitrogen(i: number, p: readonly number[]): boolean {
    if (p.length !== 2 || !this.carbonHydrogens[i] || this.hasMetal(i)) return false;
    return p.every(j => this.z[j] !== 1) && p.some(j => this.score(i, j) < 0.75);
  }

  /** Double bonds that stand alone and are short: nothing else can claim their atoms. */
  private commitClear(edges: readonly { i: number; j: number; score: number }[]): void {
    const best = new Float64Array(this.n).fill(Infinity);
    const second = new Float64Array(this.n).fill(Infinity);
    for (const { i, j, score } of edges) {
      for (const atom of [i, j]) {
        if (score < best[atom]!) {
          second[atom] = best[atom]!;
          best[atom] = score;
        } else if (score < second[atom]!) second[atom] = score;
      }
    }
    for (const { i, j, score } of edges) {
      if (score > 0.3 || this.pi[i]! > 0 || this.pi[j]! > 0) continue;
      const clear = (atom: number): boolean => best[atom] === score && second[atom]! - score > 0.35;
      if (clear(i) && clear(j)) this.set(i, j, 2);
    }
  }

  private complete(): void {
    for (let i = 0; i < this.n; i++) {
      if (!this.open(i)) {
        continue;
      }
      const z = this.z[i]!;
      if (isMetal(z)) continue;
      let sum = 0;
      for (let k = this.start[i]!; k < this.start[i + 1]!; k++) sum += this.orders[this.bond[k]!]!;
      const metal = this.hasMetal(i);
      const count = this.partners(i).length;
      if (z === 7 && this.charges[i] === 0 && sum === 4) this.charges[i] = 1;
      if (z === 5 && sum === 4) this.charges[i] = -1;
      if ((z === 15 || z === 33 || z === 51) && count === 6 && sum === 6) this.charges[i] = -1;
      if (z === 8 && sum === 3 && !metal) this.charges[i] = 1;
      if (z === 16 && count === 3 && sum === 3) this.charges[i] = 1;
      if (this.charges[i] !== 0) {
        if (z === 7 && this.charges[i] === 1 && !this.polarHydrogens[i])
          this.hydrogens[i] = defaultHydrogens(z, 1, sum);
        continue;
      }
      const missing = defaultHydrogens(z, 0, sum);
      if (missing === 0) continue;
      if (z === 6) {
        if (metal) {
          // Carbons bound side-on keep what they show; without listed hydrogens one is implied on two-coordinate ones.
          if (!this.carbonHydrogens[i] && count === 2 && this.flat[i]) this.hydrogens[i] = 1;
          continue;
        }
        this.hydrogens[i] = missing;
        if (this.flat[i] && this.pi[i] === 0) this.doubtful[i] = 1;
        continue;
      }
      // How a ligand and its metal share their charge is not told by geometry.
      if (metal) continue;
      if (this.anionic[i] && this.polarHydrogens[i]) {
        this.charges[i] = -1;
        continue;
      }
      const halogen = z === 9 || z === 17 || z === 35 || z === 53;
      if (halogen && count === 0) {
        this.charges[i] = -1;
        continue;
      }
      this.hydrogens[i] = missing;
      if (this.carbonHydrogens[i] && count > 0) this.doubtful[i] = 1;
    }
  }
}

/**
 * A matching that covers as many required atoms (need 2) as can be.
 *
 * Others are drawn in one at a time, optional ones (need 1) before the rest, those with the shortest bonds first, and only where one more
 * required atom is covered by it: the sets of atoms that a matching can cover form a matroid, so that this greedy choice
 * reaches the most (J. Edmonds & D. R. Fulkerson, J. Res. Natl Bur. Stand. 1965, 69B, 147).
 */
function matchRequired(
  n: number,
  need: Uint8Array,
  edges: readonly { i: number; j: number; score: number }[],
): Int32Array {
  const partner = new Int32Array(n).fill(-1);
  const place = new Map<number, number>();
  const atoms: number[] = [];
  const groups: number[] = [];
  const root = (k: number): number => {
    let at = k;
    while (groups[at] !== at) at = groups[at]!;
    return at;
  };
  // Numbered in the order of the shortest bond: the matching starts with those.
  const pairs = edges.map(({ i, j }): [number, number] => {
    const [a, b] = [i, j].map(atom => {
      let at = place.get(atom);
      if (at === undefined) {
        at = atoms.length;
        place.set(atom, at);
        atoms.push(atom);
        groups.push(at);
      }
      return at;
    }) as [number, number];
    groups[root(a)] = root(b);
    return [a, b];
  });
  const members = new Map<number, number[]>();
  atoms.forEach((_, k) => {
    const key = root(k);
    const list = members.get(key);
    if (list) list.push(k);
    else members.set(key, [k]);
  });
  for (const [key, list] of members) {
    const own = pairs.filter(([a]) => root(a) === key);
    const needs = new Uint8Array(atoms.length);
    for (const k of list) if (need[atoms[k]!] === 2) needs[k] = 1;
    const run = (): { partner: Int32Array; open: number } => {
      const matched = perfectMatching(
        atoms.length,
        needs,
        own.filter(([a, b]) => needs[a] && needs[b]),
      );
      return { partner: matched.partner, open: matched.unmatched.length };
    };
    let best = run();
    for (const k of [...list].sort((x, y) => need[atoms[y]!]! - need[atoms[x]!]! || x - y)) {
      if (best.open === 0) break;
      if (needs[k]) continue;
      needs[k] = 1;
      const wider = run();
      if (wider.open < best.open) best = wider;
      else needs[k] = 0;
    }
    for (const k of list) {
      const other = best.partner[k]!;
      if (other >= 0) partner[atoms[k]!] = atoms[other]!;
    }
  }
  return partner;
}
