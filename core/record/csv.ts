/** The record as CSV (RFC 4180): a line for each unit, and one for each entry without units. */
import type { EntryRecord, UnitRecord } from './json.ts';

const HEADINGS = [
  'file',
  'entry',
  'name',
  'formula',
  'relation',
  'kind',
  'atoms',
  'labels',
  'residue',
  'descriptor',
  'state',
  'signed volume / A3',
  'sigma / A3',
  'torsion / deg',
  'firmness',
  'ranking',
  'decided by',
  'intended',
  'verdict',
  'labile',
  'warnings',
  'error',
] as const;

/** One field: quoted where it holds a comma, a quote or a line end; a leading formula sign is kept from acting as one in a spreadsheet. */
function field(value: string | number | null | undefined): string {
  if (value === null || value === undefined) return '';
  if (typeof value === 'number') return String(value);
  const safe = /^[=+\-@\t\r]/u.test(value) ? `'${value}` : value;
  return /[",\r\n]/u.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe;
}

function line(fields: readonly (string | number | null | undefined)[]): string {
  return `${fields.map(field).join(',')}\r\n`;
}

/** The heading line. */
export function csvHead(): string {
  return line(HEADINGS);
}

/** The lines of one entry. */
export function csvLines(record: EntryRecord): string {
  const entry = [record.file, record.entry, record.name, record.formula, record.relation];
  const error = record.error === null ? null : `${record.error.code}: ${record.error.message}`;
  if (record.units.length === 0)
    return line([...entry, ...Array.from<null>({ length: 16 }).fill(null), error]);
  return record.units.map(unit => line([...entry, ...unitFields(unit), error])).join('');
}

function unitFields(unit: UnitRecord): (string | number | null | undefined)[] {
  const ranking = unit.ranking.map(
    ({ atom, implicit, rank, end }) =>
      `${end === undefined ? '' : `${end}:`}${rank} ${atom ?? implicit ?? ''}`,
  );
  const rules = [
    ...new Set(unit.ranking.flatMap(({ decidedBy }) => (decidedBy === undefined ? [] : [decidedBy]))),
  ];
  return [
    unit.kind,
    unit.atoms.join(' '),
    unit.labels.join(' '),
    unit.residue,
    unit.descriptor,
    unit.state,
    unit.signedVolume,
    unit.sigma,
    unit.torsion,
    unit.firmness,
    ranking.join('; '),
    rules.join(' '),
    unit.intended,
    unit.verdict,
    unit.labile,
    unit.warnings?.join('; '),
  ];
}
