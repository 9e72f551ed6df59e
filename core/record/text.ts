/** The record of a checked entry as lines for reading in a terminal. */
import type { EntryRecord, UnitRecord } from './json.ts';

const MINUS = '\u2212';

/** A number with a true minus sign and a fixed number of digits. */
export function figure(value: number, digits: number): string {
  return value.toFixed(digits).replace('-', MINUS);
}

/** How a descriptor is shown where the coordinates give none. */
function descriptorText(unit: UnitRecord): string {
  if (unit.descriptor !== null) return unit.descriptor;
  return unit.state === 'clear' ? 'no letter' : unit.state;
}

/** The atoms of a unit; those of the intention where the model lacks them. */
function nameOf(unit: UnitRecord): string {
  const labels = unit.labels.join('=');
  if (labels === '') return `${unit.intendedLabels?.join('=') ?? 'a unit'} of the intention`;
  return unit.residue ? `${unit.residue} ${labels}` : labels;
}

function measureText(unit: UnitRecord): string {
  const parts: string[] = [];
  if (unit.signedVolume !== null) {
    const sigma = unit.sigma === null ? '' : ` ± ${figure(unit.sigma, 2)}`;
    parts.push(`V ${figure(unit.signedVolume, 2)}${sigma} Å³`);
  }
  if (unit.torsion !== null) parts.push(`τ ${figure(unit.torsion, 1)}°`);
  if (unit.firmness !== null) parts.push(`firmness ${figure(unit.firmness, 2)}`);
  return parts.join('  ');
}

function verdictText(unit: UnitRecord): string {
  const group = unit.group ? ` in ${unit.group}` : '';
  if (unit.verdict === null) return '';
  if (unit.verdict === 'open') return 'open';
  return `intended ${unit.intended ?? 'as given'}${group}: ${unit.verdict}`;
}

/** Lines of a table: cells padded to the widest of their column. */
export function columns(rows: readonly (readonly string[])[], indent: string): string[] {
  const widths: number[] = [];
  for (const row of rows) {
    row.forEach((cell, c) => {
      widths[c] = Math.max(widths[c] ?? 0, cell.length);
    });
  }
  return rows.map(row => (indent + row.map((cell, c) => cell.padEnd(widths[c]!)).join('  ')).trimEnd());
}

/** The lines of one entry, each ending in a line feed. */
export function entryText(record: EntryRecord): string {
  const title = [record.file, String(record.entry), record.name, record.formula].filter(part => part !== '');
  const head = title.join('  ');
  const lines: string[] = [];
  if (record.error && record.units.length === 0 && record.relation === null) {
    const at = record.error.line === null ? '' : ` (line ${record.error.line})`;
    return `${head}  not read${at}: ${record.error.message}\n`;
  }
  lines.push(record.relation === null ? head : `${head}  ${record.relation}`);
  if (record.error) lines.push(`  ${record.error.message}`);
  if (record.difference) lines.push(`  ${record.difference}`);
  for (const { id, formula, relation } of record.molecules ?? []) {
    if (relation !== null) lines.push(`  molecule ${id}, ${formula}: ${relation}`);
  }
  const rows = record.units.map(unit => [
    nameOf(unit),
    unit.kind,
    descriptorText(unit),
    measureText(unit),
    verdictText(unit),
    [
      unit.labile ? `labile: ${unit.labile}` : '',
      unit.distorted ? `distorted, ${figure(unit.distorted.ideal, 2)} expected` : '',
    ]
      .filter(note => note !== '')
      .join('; '),
  ]);
  lines.push(...columns(rows, '  '));
  if (record.units.length === 0 && !record.error) lines.push('  no stereogenic units');
  if (record.invertedChoices) {
    const named = record.invertedChoices.map(choice => choice.map(atoms => atoms.join('-')).join('+'));
    lines.push(`  by symmetry the inverted atoms may be called ${named.join(' or ')}`);
  }
  for (const unit of record.units) {
    for (const warning of unit.warnings ?? []) lines.push(`  ${unit.labels.join('=')}: ${warning}`);
  }
  for (const warning of record.warnings) lines.push(`  ${warning}`);
  return `${lines.join('\n')}\n`;
}
