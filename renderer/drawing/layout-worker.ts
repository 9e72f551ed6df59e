/** Lays structures out in the plane with rdkit.js, in a worker of its own, which alone may run what its WebAssembly module builds. */
import initRDKitModule from '@rdkit/rdkit';
import wasm from '@rdkit/rdkit/RDKit_minimal.wasm?url';
import { config } from 'zod';
import { smilesOf } from '../../core/formats/smiles-writer.ts';
import { layoutRequest, type LayoutAnswer } from './layout-messages.ts';
import { skeletonOf } from './skeleton.ts';

config({ jitless: true });

type Chemistry = Awaited<ReturnType<typeof initRDKitModule>>;
let loading: Promise<Chemistry> | null = null;

/** Most atoms of a drawing that can still be read. */
const MOST_ATOMS = 250;

function answer(message: LayoutAnswer): void {
  self.postMessage(message, { transfer: [] });
}

interface CommonChemistry {
  readonly molecules: readonly {
    readonly conformers?: readonly { readonly coords: readonly (readonly number[])[] }[];
  }[];
}

async function layOut(request: ReturnType<typeof layoutRequest.parse>): Promise<Float64Array | null> {
  const { molecule, units, focus } = request;
  const layout = new Float64Array(2 * molecule.atomCount).fill(Number.NaN);
  const skeleton = skeletonOf(molecule, units, focus);
  if (skeleton.atoms.length === 0 || skeleton.atoms.length > MOST_ATOMS) return null;
  if (molecule.dimension === 2 && molecule.coordinates) {
    for (const atom of skeleton.atoms) {
      layout[2 * atom] = molecule.coordinates[3 * atom]!;
      layout[2 * atom + 1] = molecule.coordinates[3 * atom + 1]!;
    }
    return layout;
  }
  loading ??= initRDKitModule({ locateFile: () => wasm });
  const chemistry = await loading;
  const { smiles, order } = smilesOf(skeleton.molecule);
  const laid = chemistry.get_mol(smiles, JSON.stringify({ removeHs: false, sanitize: false }));
  if (!laid) return null;
  try {
    laid.set_new_coords();
    const json = JSON.parse(laid.get_json()) as CommonChemistry;
    const coordinates = json.molecules[0]?.conformers?.[0]?.coords;
    if (coordinates?.length !== order.length) return null;
    order.forEach((atom, k) => {
      const own = atom < 0 ? undefined : skeleton.atoms[atom];
      if (own === undefined) return;
      layout[2 * own] = coordinates[k]![0]!;
      layout[2 * own + 1] = coordinates[k]![1]!;
    });
    return layout;
  } finally {
    laid.delete();
  }
}

self.addEventListener('message', (event: MessageEvent<unknown>) => {
  const message = layoutRequest.parse(event.data);
  layOut(message).then(
    layout => answer({ request: message.request, layout, problem: null }),
    (error: unknown) =>
      answer({
        request: message.request,
        layout: null,
        problem: error instanceof Error ? error.message : String(error),
      }),
  );
});
