/** What stands around a unit in a macromolecule, drawn by 3dmol under the sight with the same camera: the trace of the chain. */
import type { Quaternion, Vector3 } from 'three';
import { DARK, LIGHT } from '../sight/colours.ts';

type Library = typeof import('3dmol/build/3Dmol.es6-min.js');
type Viewer = ReturnType<Library['createViewer']>;

/** Tone of the ribbon on either paper. */
const RIBBON = { light: '#b9b3a2', dark: '#565c65' } as const;
/** What is drawn of the chain in front of and behind the unit, Å. */
const IN_FRONT = -4;
const BEHIND = 60;

/** The library's names of the formats that can hold a macromolecule, by file name; null for others. */
export function surroundingsFormat(fileName: string): 'pdb' | 'mcif' | null {
  const name = fileName.toLowerCase().replace(/\.gz$/u, '');
  if (/\.(pdb|ent)$/u.test(name)) return 'pdb';
  return /\.(cif|mmcif)$/u.test(name) ? 'mcif' : null;
}

export class Surroundings {
  readonly #viewer: Viewer;
  #loaded = '';
  #dark: boolean | null = null;

  private constructor(viewer: Viewer) {
    this.#viewer = viewer;
  }

  /** Loads the library when surroundings are first wanted. */
  static async create(place: HTMLElement): Promise<Surroundings> {
    const library = await import('3dmol/build/3Dmol.es6-min.js');
    const viewer = library.createViewer(place, { disableFog: true, antialias: true });
    viewer.setSlab(IN_FRONT, BEHIND);
    return new Surroundings(viewer);
  }

  /** Shows a model, given as the text of its file, on light or dark paper. */
  show(key: string, text: string, format: 'pdb' | 'mcif', dark: boolean): void {
    if (this.#loaded === key && this.#dark === dark) return;
    if (this.#loaded !== key) {
      this.#viewer.removeAllModels();
      this.#viewer.addModel(text, format, { doAssembly: false });
    }
    this.#loaded = key;
    this.#dark = dark;
    this.#viewer.setBackgroundColor(dark ? DARK.paper : LIGHT.paper, 1);
    this.#viewer.setStyle({}, { cartoon: { color: dark ? RIBBON.dark : RIBBON.light, thickness: 0.3 } });
    this.#viewer.render();
  }

  /** Follows the sight: `turn` and `pivot` of its model, `z` of its rotation group. */
  follow(pivot: Vector3, turn: Quaternion, z: number): void {
    this.#viewer.setView([-pivot.x, -pivot.y, -pivot.z, z, turn.x, turn.y, turn.z, turn.w], true);
  }

  resize(): void {
    this.#viewer.resize();
  }
}
