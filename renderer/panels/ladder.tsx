/** The ladder drawn as the reasoning it is: spheres side by side, the first difference marked, the rule named. */
import type { ReactElement } from 'react';
import { ligandName } from '../caption.ts';
import type { LadderNode, LadderSphere, LadderStep, RankedLigand } from '../../core/docket.ts';
import type { Molecule } from '../../core/chemistry/molecule.ts';
import { TEXT } from '../text.ts';
import { useAppState, useController } from '../use-store.ts';

export function LadderPanel(): ReactElement {
  const { model, unit, ladder } = useAppState('model', 'unit', 'ladder');
  const labelled = model?.docket?.units[unit];
  const molecule = model?.molecule ?? null;
  return (
    <section className="panel ladder" aria-labelledby="ladder-title">
      <header className="panel-head">
        <h2 id="ladder-title">{TEXT.ladder}</h2>
        {ladder?.ladder && <span className="fine">{ladder.ladder.nodes} nodes</span>}
      </header>
      <div className="panel-body" tabIndex={0} role="group" aria-label={TEXT.ladderSteps}>
        {molecule && labelled && labelled.ranking.length > 0 && (
          <Ranks molecule={molecule} ranking={labelled.ranking} />
        )}
        {ladder?.problem && <p className="fine">{ladder.problem}.</p>}
        {ladder?.ladder && ladder.ladder.steps.length === 0 && <p className="fine">{TEXT.noLadder}</p>}
        {molecule && ladder?.ladder && (
          <ol className="steps">
            {ladder.ladder.steps.map((step, k) => (
              <li key={k}>
                <Step molecule={molecule} step={step} />
              </li>
            ))}
          </ol>
        )}
        {molecule && ladder?.ladder && ladder.ladder.auxiliary.length > 0 && (
          <p className="fine">
            {TEXT.auxiliary}:{' '}
            {ladder.ladder.auxiliary
              .map(
                ({ atoms, descriptor }) =>
                  `${atoms.map(atom => ligandName(molecule, atom)).join('=')} ${descriptor}`,
              )
              .join(', ')}
          </p>
        )}
      </div>
    </section>
  );
}

function AtomButton({
  molecule,
  atom,
}: {
  readonly molecule: Molecule;
  readonly atom: number;
}): ReactElement {
  const controller = useController();
  const { lit } = useAppState('lit');
  const name = ligandName(molecule, atom);
  if (atom < 0) return <span className="atom-name">{name}</span>;
  return (
    <button
      type="button"
      className={`atom-name${lit === atom ? ' lit' : ''}`}
      aria-pressed={lit === atom}
      onClick={() => controller.light(lit === atom ? null : atom)}
    >
      {name}
    </button>
  );
}

function Ranks({
  molecule,
  ranking,
}: {
  readonly molecule: Molecule;
  readonly ranking: readonly RankedLigand[];
}): ReactElement {
  const ends = [...new Set(ranking.map(place => place.end))];
  return (
    <>
      {ends.map(end => (
        <ol
          key={String(end)}
          className="ranks"
          aria-label={end === null ? TEXT.ranking : `${TEXT.ranking}, end ${end}`}
        >
          {ranking
            .filter(place => place.end === end)
            .map(place => (
              <li key={place.ligand}>
                <b>
                  {place.rank}
                  {end === 2 ? '′' : ''}
                </b>
                <AtomButton molecule={molecule} atom={place.ligand} />
              </li>
            ))}
        </ol>
      ))}
    </>
  );
}

function Step({ molecule, step }: { readonly molecule: Molecule; readonly step: LadderStep }): ReactElement {
  return (
    <article className="step">
      <h3>
        <AtomButton molecule={molecule} atom={step.above} />
        <span aria-hidden="true">&gt;</span>
        <span className="said">before</span>
        <AtomButton molecule={molecule} atom={step.below} />
        {step.rule !== null && (
          <span className="rule">
            rule {step.rule}, sphere {step.sphere}
          </span>
        )}
      </h3>
      {step.spheres.length > 0 && (
        <table>
          <thead>
            <tr>
              <th scope="col">sphere</th>
              <th scope="col">{ligandName(molecule, step.above)}</th>
              <th scope="col">{ligandName(molecule, step.below)}</th>
            </tr>
          </thead>
          <tbody>
            {step.spheres.map(sphere => (
              <tr key={sphere.sphere} className={sphere.difference ? 'decides' : undefined}>
                <th scope="row">{sphere.sphere}</th>
                <td>
                  <Sets sets={sphere.above} sphere={sphere} />
                </td>
                <td>
                  <Sets sets={sphere.below} sphere={sphere} />
                </td>
              </tr>
            ))}
          </tbody>
        </table>
      )}
      <p className="fine">{step.summary.replace(/^Rule [^:]*: /u, '')}</p>
    </article>
  );
}

function Sets({
  sets,
  sphere,
}: {
  readonly sets: readonly (readonly LadderNode[])[];
  readonly sphere: LadderSphere;
}): ReactElement {
  const { difference } = sphere;
  if (sets.length === 0) return <span className="nothing">{difference ? 'nothing' : ''}</span>;
  return (
    <>
      {sets.map((set, s) => (
        <span key={s} className="set">
          {set.map((node, n) => (
            <Node key={n} node={node} differs={difference?.set === s && difference.place === n} />
          ))}
        </span>
      ))}
    </>
  );
}

function Node({ node, differs }: { readonly node: LadderNode; readonly differs: boolean }): ReactElement {
  const controller = useController();
  const { lit } = useAppState('lit');
  const name = `node${differs ? ' differs' : ''}${node.nature === 'real' ? '' : ' duplicate'}${lit !== null && lit === node.atom ? ' lit' : ''}`;
  if (node.atom < 0) return <span className={name}>{node.text}</span>;
  return (
    <button
      type="button"
      className={name}
      title={node.nature}
      onClick={() => controller.light(lit === node.atom ? null : node.atom)}
    >
      {node.text}
    </button>
  );
}
