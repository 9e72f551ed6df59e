/** The writers against rdkit.js over all published structures: what we write is the molecule that was read. */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { DEFAULT_LIMITS, type RawEntry } from '../../core/formats/format.ts';
import { writeMolfile, writeSdfEntry } from '../../core/formats/molfile-writer.ts';
import { sdfFormat } from '../../core/formats/sdf.ts';
import { smilesOf, writeSmiles } from '../../core/formats/smiles-writer.ts';
import { parseSmiles } from '../../core/formats/smiles.ts';
import { type RDKit, rdkitModule } from '../rdkit.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';

const RUN = (path: string | null): { skip: boolean } => ({ skip: path === null });

/** The witness, left to itself, takes H3P=O of a Molfile for HP=O on removing hydrogens: they stay on both sides. */
const KEEP_HYDROGENS = '{"removeHs":false}';

function canonical(rdkit: RDKit, text: string, options = '{}'): string | null {
  const molecule = rdkit.get_mol(text, options);
  const smiles = molecule?.get_smiles() ?? null;
  molecule?.delete();
  return smiles;
}

function withoutStereo(rdkit: RDKit, smiles: string | null, options = KEEP_HYDROGENS): string | null {
  return smiles === null ? null : canonical(rdkit, smiles.replace(/[@/\\]/gu, ''), options);
}

function smilesIn(path: string): string[] {
  return readFileSync(path, 'utf8')
    .split('\n')
    .map(line => line.split(/\s/u)[0]!)
    .filter(smiles => smiles !== '');
}

async function rawEntries(path: string): Promise<RawEntry[]> {
  async function* chunks(): AsyncGenerator<Uint8Array> {
    yield await Promise.resolve(new Uint8Array(readFileSync(path)));
  }
  const list: RawEntry[] = [];
  for await (const raw of sdfFormat.split(chunks(), DEFAULT_LIMITS)) list.push(raw);
  return list;
}

describe(`SMILES that are read and written again (skipped where ${SHARED_DATA_ABSENT})`, () => {
  for (const [name, least] of [
    ['chembl-chiral/chembl-20-chiral.smi', 5000],
    ['cip/suite.smi', 200],
  ] as const) {
    const path = sharedData(name);
    it(`${name}: the same canonical SMILES, centres and double bonds included`, RUN(path), async () => {
      const rdkit = await rdkitModule();
      const differing: string[] = [];
      const all = smilesIn(path!);
      for (const smiles of all) {
        const { smiles: written, dropped } = smilesOf(parseSmiles(smiles).molecule);
        if (dropped.length > 0 || canonical(rdkit, written) !== canonical(rdkit, smiles)) {
          differing.push(`${smiles} ${written}`);
        }
      }
      expect(differing).toEqual([]);
      expect(all.length).toBeGreaterThanOrEqual(least);
    });
  }

  const path = sharedData('chembl-chiral/chembl-20-chiral.smi');
  it('as Molfiles of both versions: the same constitution, hydrogens and charges', RUN(path), async () => {
    const rdkit = await rdkitModule();
    const differing: string[] = [];
    for (const smiles of smilesIn(path!)) {
      const flat = { ...parseSmiles(smiles).molecule, stated: [] };
      const wanted = canonical(rdkit, writeSmiles(flat));
      for (const version of ['V2000', 'V3000'] as const) {
        if (canonical(rdkit, writeMolfile(flat, { version })) !== wanted)
          differing.push(`${version} ${smiles}`);
      }
    }
    expect(differing).toEqual([]);
  });
});

describe(`SDF entries that are read and written again (skipped where ${SHARED_DATA_ABSENT})`, () => {
  for (const [name, count] of [
    ['cip/suite-3d.sdf', 200],
    ['cip/suite-2d.sdf', 200],
    ['mmff94/structures.sdf', 500],
    ['poses/cdk2.sdf', 47],
  ] as const) {
    const path = sharedData(name);
    it(
      `${name}: the same molecule and data from either version, the witness's constitution`,
      RUN(path),
      async () => {
        const rdkit = await rdkitModule();
        const entries = await rawEntries(path!);
        expect(entries).toHaveLength(count);
        for (const raw of entries) {
          const [entry] = sdfFormat.parse(raw, DEFAULT_LIMITS);
          const molecule = entry!.molecule!;
          for (const version of ['V2000', 'V3000'] as const) {
            const text = writeSdfEntry(molecule, { version, data: entry!.data });
            const [again] = sdfFormat.parse(
              { ...raw, bytes: new TextEncoder().encode(text) },
              DEFAULT_LIMITS,
            );
            expect(again!.molecule).toEqual(molecule);
            expect(again!.data).toEqual(entry!.data);
          }
          const text = new TextDecoder().decode(raw.bytes).replace(/^\$\$\$\$\n?/mu, '');
          const theirs = withoutStereo(rdkit, canonical(rdkit, text, KEEP_HYDROGENS));
          expect([entry!.name, withoutStereo(rdkit, writeSmiles(molecule))]).toEqual([entry!.name, theirs]);
        }
      },
    );
  }
});

describe(`SDF and SMILES of the same structures (skipped where ${SHARED_DATA_ABSENT})`, () => {
  const drawn = sharedData('cip/suite-2d.sdf');
  const listed = sharedData('cip/suite.smi');
  it('cip/suite-2d.sdf and cip/suite.smi agree', RUN(drawn && listed), async () => {
    const rdkit = await rdkitModule();
    const smiles = smilesIn(listed!);
    const differing: string[] = [];
    (await rawEntries(drawn!)).forEach((raw, i) => {
      const molecule = sdfFormat.parse(raw, DEFAULT_LIMITS)[0]!.molecule!;
      const ours = withoutStereo(rdkit, writeSmiles(molecule), '{}');
      if (ours !== withoutStereo(rdkit, smiles[i]!, '{}')) differing.push(`${i + 1} ${ours} ${smiles[i]!}`);
    });
    expect(differing).toEqual([]);
  });
});
