/** The sight as drawn: a canvas for the model, an SVG over it for the dial; one camera, drawn only when something changed. */
import {
  Group,
  Matrix4,
  type Mesh,
  PerspectiveCamera,
  Quaternion,
  Scene,
  Vector3,
  WebGLRenderer,
} from 'three';
import { elementSymbol } from '../../core/chemistry/elements.ts';
import { atomLabel, isLocated, type Molecule } from '../../core/chemistry/molecule.ts';
import type { Descriptor, LabelledUnit } from '../../core/docket.ts';
import type { SightFrame } from '../../core/record/sight-frame.ts';
import type { UnitKind } from '../../core/perception/unit.ts';
import { DARK, LIGHT } from './colours.ts';
import { dialOf } from './dial.ts';
import { dialGroup, dialWords } from './dial-drawing.ts';
import { frameOf } from './frames.ts';
import { ballMesh, InkUniforms, rodMesh } from './impostors.ts';
import { type IntendedModel, intendedRods } from './intended-overlay.ts';
import { modelGeometry, unitAtoms } from './model-geometry.ts';

/** The camera that sight and surroundings share (three's perspective, vertical angle in degrees; distance in Å). */
const FIELD = 20;
const CAMERA_DISTANCE = 150;
/** Half the height of the view around a unit, Å. */
const HALF_HEIGHT = 3.45;
const HALF_HEIGHTS: Readonly<Record<UnitKind, number>> = {
  centre: HALF_HEIGHT,
  'double-bond': 4,
  cumulene: 4.2,
  axis: 4.2,
  helix: 5.4,
  plane: 3.9,
};
/** What recedes has faded this far behind the unit, Å. */
const DEPTH = 14;
/** What recedes is left out this much in front of the unit, Å. */
const FRONT = 3;
/** Width over height below which the view is drawn smaller. */
const LEAST_ASPECT = 1.12;
/** Length of a turn between units, ms. */
const TURN_TIME = 420;
/** Atoms within this many px of the pointer can be picked. */
const PICK_PX = 16;
/** More atoms than this are drawn coarser while they move. */
const HEAVY = 8000;
const HEAVY_SCALE = 0.7;
/** How long nothing must have moved before the picture is drawn finer, ms. */
const REST_DELAY = 140;
/** Supersampling of a picture at rest. */
const REST_SCALE = 2;

export type Side = 'sight' | 'far' | 'free';

export interface SightContent {
  readonly molecule: Molecule;
  readonly labelled: LabelledUnit | null;
  /** The letter that was asked for where the found one is inverted. */
  readonly intended: string | null;
  /** The intended model, to be laid over the unit; null without coordinates or where it is not asked for. */
  readonly overlay: IntendedModel | null;
}

export interface SightLook {
  readonly dark: boolean;
  readonly hydrogens: boolean;
  readonly labels: boolean;
  readonly motion: boolean;
  readonly lit: number | null;
  /** Whether the mirror image stands beside the model. */
  readonly mirror: boolean;
}

export interface SightEvents {
  readonly onPick: (atom: number | null) => void;
  readonly onSide: (side: Side) => void;
  /** The view as it is drawn: what stands in the middle, the rotation, where the rotated group stands. */
  readonly onPose: (pivot: Vector3, turn: Quaternion, z: number) => void;
}

interface Pose {
  readonly turn: Quaternion;
  readonly pivot: Vector3;
  readonly halfHeight: number;
}

/** The letter of the mirror image: R/S, M/P and e/z change; r/s, m/p and E/Z stay. */
export function mirrorDescriptor(descriptor: Descriptor | null): Descriptor | null {
  const swaps: Partial<Record<Descriptor, Descriptor>> = { R: 'S', S: 'R', M: 'P', P: 'M', e: 'z', z: 'e' };
  return descriptor === null ? null : (swaps[descriptor] ?? descriptor);
}

const ease = (t: number): number => (t < 0.5 ? 4 * t * t * t : 1 - (-2 * t + 2) ** 3 / 2);

/** The rotation that takes model axes to the reader's. */
function rotationOf(frame: SightFrame): Quaternion {
  const { right, up, toReader } = frame;
  const matrix = new Matrix4().set(
    right[0],
    right[1],
    right[2],
    0,
    up[0],
    up[1],
    up[2],
    0,
    toReader[0],
    toReader[1],
    toReader[2],
    0,
    0,
    0,
    0,
    1,
  ); // prettier-ignore
  return new Quaternion().setFromRotationMatrix(matrix);
}

const distanceFor = (halfHeight: number): number => halfHeight / Math.tan((FIELD * Math.PI) / 360);

export class SightView {
  readonly #renderer: WebGLRenderer;
  readonly #scene = new Scene();
  readonly #camera = new PerspectiveCamera(FIELD, 1, 1, 1000);
  /** Scene > rotation > model, as the surroundings' viewer has it; the outermost makes the mirror image. */
  readonly #reflection = new Group();
  readonly #rotation = new Group();
  readonly #model = new Group();
  readonly #uniforms = new InkUniforms();
  readonly #svg: SVGSVGElement;
  readonly #events: SightEvents;
  #meshes: Mesh[] = [];
  #content: SightContent | null = null;
  #look: SightLook = { dark: false, hydrogens: false, labels: true, motion: true, lit: null, mirror: false };
  #pose: Pose = { turn: new Quaternion(), pivot: new Vector3(), halfHeight: HALF_HEIGHT };
  #home: Pose = this.#pose;
  #side: Side = 'sight';
  #zoom = 1;
  #size = '';
  #width = 1;
  #height = 1;
  #frame = 0;
  #rest: ReturnType<typeof setTimeout> | undefined;
  #animation: { from: Pose; to: Pose; start: number; lift: number } | null = null;
  /** Frames drawn so far; also on the overlay, where one can see that nothing is drawn without need. */
  #frames = 0;

  constructor(canvas: HTMLCanvasElement, svg: SVGSVGElement, events: SightEvents) {
    this.#renderer = new WebGLRenderer({
      canvas,
      antialias: false,
      alpha: true,
    });
    this.#svg = svg;
    this.#events = events;
    this.#camera.position.set(0, 0, CAMERA_DISTANCE);
    this.#rotation.add(this.#model);
    this.#reflection.add(this.#rotation);
    this.#scene.add(this.#reflection);
    window.addEventListener('beforeprint', this.drawNow);
  }

  /** Draws at once, for print. */
  readonly drawNow = (): void => this.#draw(REST_SCALE * Math.max(1, window.devicePixelRatio));

  dispose(): void {
    window.removeEventListener('beforeprint', this.drawNow);
    cancelAnimationFrame(this.#frame);
    clearTimeout(this.#rest);
    this.#clear();
    this.#renderer.dispose();
  }

  get side(): Side {
    return this.#side;
  }

  /** Shows another molecule or another unit of the same; the view turns there. */
  show(content: SightContent | null): void {
    const before = this.#content;
    this.#content = content;
    if (!content || before?.molecule !== content.molecule || before.labelled !== content.labelled) {
      this.#rebuild();
      this.#home = this.#sightPose();
      this.#zoom = 1;
      this.#setSide('sight');
      this.#go(this.#home, before !== null && content !== null);
    } else {
      if (before.overlay !== content.overlay) this.#rebuild();
      this.#request();
    }
  }

  setLook(look: SightLook): void {
    const changed =
      look.dark !== this.#look.dark || look.hydrogens !== this.#look.hydrogens || look.lit !== this.#look.lit;
    this.#look = look;
    if (changed) this.#rebuild();
    this.#request();
  }

  resize(width: number, height: number): void {
    if (width === this.#width && height === this.#height) return;
    this.#width = Math.max(1, width);
    this.#height = Math.max(1, height);
    this.#camera.aspect = this.#width / this.#height;
    this.#camera.updateProjectionMatrix();
    this.#request();
  }

  /** Back to the sight. */
  toSight(): void {
    this.#zoom = 1;
    this.#setSide('sight');
    this.#go(this.#home, true);
  }

  /** To the other side of the unit, or back: a half turn about the upright. */
  toFarSide(): void {
    if (this.#side === 'far') {
      this.toSight();
      return;
    }
    const half = new Quaternion().setFromAxisAngle(new Vector3(0, 1, 0), Math.PI);
    this.#setSide('far');
    this.#go({ ...this.#home, turn: half.multiply(this.#home.turn) }, true);
  }

  /** Turns the model by angles about the reader's upright and level, radians. */
  orbit(sideways: number, upwards: number): void {
    const pose = this.#animation?.to ?? this.#pose;
    this.#animation = null;
    const turn = new Quaternion()
      .setFromAxisAngle(new Vector3(0, 1, 0), sideways)
      .multiply(new Quaternion().setFromAxisAngle(new Vector3(1, 0, 0), upwards))
      .multiply(pose.turn)
      .normalize();
    this.#pose = { ...pose, turn };
    this.#setSide('free');
    this.#request();
  }

  /** Nearer for a factor below 1. */
  zoom(factor: number): void {
    this.#zoom = Math.min(8, Math.max(0.35, this.#zoom * factor));
    this.#request();
  }

  /** The atom under a point of the view, px from its top left; null for none. */
  atomAt(x: number, y: number): number | null {
    const molecule = this.#content?.molecule;
    if (!molecule) return null;
    let best: number | null = null;
    let nearest = -Infinity;
    for (let i = 0; i < molecule.atomCount; i++) {
      if (!isLocated(molecule, i)) continue;
      if (molecule.elements[i] === 1 && !this.#look.hydrogens && !this.#own().has(i)) continue;
      const [px, py, depth] = this.#project(i);
      if (Math.hypot(px - x, py - y) <= PICK_PX && depth > nearest) {
        best = i;
        nearest = depth;
      }
    }
    return best;
  }

  pick(x: number, y: number): void {
    this.#events.onPick(this.atomAt(x, y));
  }

  #own(): ReadonlyMap<number, unknown> {
    const { molecule, labelled } = this.#content ?? {};
    return molecule && labelled ? unitAtoms(molecule, labelled) : new Map();
  }

  #setSide(side: Side): void {
    if (this.#side === side) return;
    this.#side = side;
    this.#events.onSide(side);
  }

  #clear(): void {
    for (const mesh of this.#meshes) {
      this.#model.remove(mesh);
      mesh.geometry.dispose();
      if (!Array.isArray(mesh.material)) mesh.material.dispose();
    }
    this.#meshes = [];
  }

  #rebuild(): void {
    this.#clear();
    this.#uniforms.setColours(this.#look.dark ? DARK : LIGHT);
    if (this.#content) {
      const { molecule, labelled, overlay } = this.#content;
      const { balls, rods: own } = modelGeometry(molecule, labelled, this.#look);
      const alarm = Number.parseInt((this.#look.dark ? DARK : LIGHT).alarm.slice(1), 16);
      const laid = labelled && overlay ? intendedRods(molecule, labelled, overlay, alarm) : [];
      const rods = [...own, ...laid];
      this.#meshes = [rodMesh(rods, this.#uniforms), ballMesh(balls, this.#uniforms)];
      this.#model.add(...this.#meshes);
    }
  }

  #sightPose(): Pose {
    const { molecule, labelled } = this.#content ?? {};
    const r = molecule?.coordinates;
    if (!molecule || !r) return this.#pose;
    const frame = labelled ? frameOf(molecule, labelled) : null;
    if (frame && labelled) {
      return {
        turn: rotationOf(frame),
        pivot: new Vector3(...frame.origin),
        halfHeight: HALF_HEIGHTS[labelled.unit.kind],
      };
    }
    const middle = new Vector3();
    let count = 0;
    for (let i = 0; i < molecule.atomCount; i++) {
      if (!isLocated(molecule, i)) continue;
      middle.add(new Vector3(r[3 * i], r[3 * i + 1], r[3 * i + 2]));
      count++;
    }
    if (count > 0) middle.divideScalar(count);
    let reach = HALF_HEIGHT;
    for (let i = 0; i < molecule.atomCount; i++) {
      if (isLocated(molecule, i)) {
        reach = Math.max(reach, middle.distanceTo(new Vector3(r[3 * i], r[3 * i + 1], r[3 * i + 2])) + 1);
      }
    }
    return { turn: new Quaternion(), pivot: middle, halfHeight: reach };
  }

  #go(to: Pose, moving: boolean): void {
    if (!moving || !this.#look.motion) {
      this.#animation = null;
      this.#pose = to;
      this.#request();
      return;
    }
    const from = this.#pose;
    // The way is longer the further the units are apart: the reader steps back a little, so as not to pass through.
    const lift = 0.35 * from.pivot.distanceTo(to.pivot);
    this.#animation = { from, to, start: performance.now(), lift };
    this.#request();
  }

  #request(): void {
    this.#svg.dataset['still'] = 'false';
    if (this.#frame === 0) this.#frame = requestAnimationFrame(this.#tick);
  }

  readonly #tick = (now: number): void => {
    this.#frame = 0;
    const { animation } = { animation: this.#animation };
    if (animation) {
      const t = Math.min(1, Math.max(0, (now - animation.start) / TURN_TIME));
      const s = ease(t);
      const { from, to, lift } = animation;
      this.#pose = {
        turn: from.turn.clone().slerp(to.turn, s),
        pivot: from.pivot.clone().lerp(to.pivot, s),
        halfHeight: from.halfHeight + (to.halfHeight - from.halfHeight) * s + lift * Math.sin(Math.PI * t),
      };
      if (t >= 1) {
        this.#animation = null;
        this.#pose = to;
      }
    }
    clearTimeout(this.#rest);
    const moving = this.#animation !== null;
    const heavy = (this.#content?.molecule.atomCount ?? 0) > HEAVY;
    this.#uniforms.setHalo(!heavy);
    this.#draw(heavy ? HEAVY_SCALE : 1);
    if (moving) this.#request();
    else {
      this.#rest = setTimeout(() => {
        this.#uniforms.setHalo(true);
        this.#draw(REST_SCALE * Math.max(1, window.devicePixelRatio));
        this.#svg.dataset['still'] = 'true';
      }, REST_DELAY);
    }
  };

  #draw(scale: number): void {
    this.#svg.dataset['frames'] = String(++this.#frames);
    this.#svg.dataset['still'] = 'false';
    const { turn, pivot } = this.#pose;
    const distance = distanceFor(this.#halfHeight());
    this.#rotation.quaternion.copy(turn);
    this.#rotation.position.z = CAMERA_DISTANCE - distance;
    this.#model.position.copy(pivot).negate();
    this.#camera.near = Math.max(0.5, distance - 80);
    this.#camera.far = distance + 120;
    this.#camera.updateProjectionMatrix();
    this.#uniforms.values.depthRange.value.set(distance - 1, distance + DEPTH);
    this.#uniforms.values.front.value = distance - FRONT;
    // Giving the canvas a size, even the one it has, makes a new drawing buffer.
    const size = `${this.#width} ${this.#height} ${scale}`;
    if (size !== this.#size) {
      this.#size = size;
      this.#renderer.setDrawingBufferSize(this.#width, this.#height, scale);
    }
    // Nothing is painted where nothing stands: paper, or the surroundings, lie under the canvas.
    this.#renderer.setClearColor(0x000000, 0);
    this.#renderer.autoClear = false;
    this.#renderer.setScissorTest(false);
    this.#renderer.clear();
    const panes = this.#panes();
    panes.forEach((pane, p) => {
      this.#reflection.scale.x = p === 0 ? 1 : -1;
      this.#camera.aspect = pane.width / this.#height;
      this.#camera.updateProjectionMatrix();
      this.#renderer.setViewport(pane.left, 0, pane.width, this.#height);
      this.#renderer.setScissor(pane.left, 0, pane.width, this.#height);
      this.#renderer.setScissorTest(panes.length > 1);
      this.#renderer.render(this.#scene, this.#camera);
    });
    this.#overlay();
    this.#events.onPose(pivot, turn, CAMERA_DISTANCE - distance);
  }

  /** Where an atom is drawn: px from the top left, and its depth towards the reader in Å. */
  #project(atom: number): [number, number, number] {
    const r = this.#content!.molecule.coordinates!;
    const p = new Vector3(r[3 * atom], r[3 * atom + 1], r[3 * atom + 2])
      .sub(this.#pose.pivot)
      .applyQuaternion(this.#pose.turn);
    const distance = distanceFor(this.#halfHeight());
    const k = (this.#pixelsPerUnit() * distance) / Math.max(0.1, distance - p.z);
    return [this.#panes()[0]!.width / 2 + k * p.x, this.#height / 2 - k * p.y, p.z];
  }

  /** The parts of the view: the model, and its mirror image to the right of it when wanted. */
  #panes(): readonly { readonly left: number; readonly width: number }[] {
    if (!this.#look.mirror) return [{ left: 0, width: this.#width }];
    const half = Math.floor(this.#width / 2);
    return [
      { left: 0, width: half },
      { left: half, width: half },
    ];
  }

  /** Half the height of the view, Å: more where the view is narrow, so that dial and words keep their room. */
  #halfHeight(): number {
    const aspect = this.#panes()[0]!.width / this.#height;
    return this.#pose.halfHeight * this.#zoom * Math.max(1, LEAST_ASPECT / aspect);
  }

  /** px for one Å at the depth of the unit. */
  #pixelsPerUnit(): number {
    return this.#height / 2 / this.#halfHeight();
  }

  #overlay(): void {
    const content = this.#content;
    if (!content?.labelled || !content.molecule.coordinates) {
      this.#svg.replaceChildren();
      return;
    }
    const { molecule, labelled } = content;
    const { turn, pivot } = this.#pose;
    const back = turn.clone().invert();
    const axis = (x: number, y: number, z: number): [number, number, number] => {
      const v = new Vector3(x, y, z).applyQuaternion(back);
      return [v.x, v.y, v.z];
    };
    const frame: SightFrame = {
      origin: [pivot.x, pivot.y, pivot.z],
      right: axis(1, 0, 0),
      up: axis(0, 1, 0),
      toReader: axis(0, 0, 1),
    };
    const labels: { text: string; x: number; y: number; lit: boolean }[] = [];
    const named = new Set(this.#look.labels ? this.#own().keys() : []);
    if (this.#look.lit !== null) named.add(this.#look.lit);
    const dial = dialOf(molecule, labelled, frame);
    // The fourth has its own words while it hides behind the centre.
    if (dial.hidden && dial.hidden.ligand !== this.#look.lit) named.delete(dial.hidden.ligand);
    for (const atom of named) {
      if (!isLocated(molecule, atom)) continue;
      const [x, y] = this.#project(atom);
      labels.push({ text: atomLabel(molecule, atom, elementSymbol), x, y, lit: atom === this.#look.lit });
    }
    const name = (ligand: number): string => atomLabel(molecule, ligand, elementSymbol);
    const scale = this.#pixelsPerUnit();
    const y = this.#height / 2;
    const [left, right] = this.#panes();
    const x = left!.width / 2;
    const { descriptor } = labelled;
    const groups = [dialGroup({ dial, descriptor, x, y, scale, labels, name, intended: content.intended })];
    if (right) {
      const [rx, ry, rz] = frame.right;
      const mirrored = dialOf(molecule, labelled, { ...frame, right: [-rx, -ry, -rz] });
      const other = mirrorDescriptor(descriptor);
      const centre = right.left + right.width / 2;
      groups.push(
        dialGroup({
          dial: mirrored,
          descriptor: other,
          x: centre,
          y,
          scale,
          labels: labels.map(label => ({ ...label, x: 2 * x - label.x + right.left })),
          name,
          intended: null,
        }),
        dialWords(x, this.#height - 14, `model, ${descriptor ?? 'no letter'}`),
        dialWords(centre, this.#height - 14, `mirror image, ${other ?? 'no letter'}`),
      );
    }
    this.#svg.setAttribute('viewBox', `0 0 ${this.#width} ${this.#height}`);
    this.#svg.replaceChildren(...groups);
  }
}
