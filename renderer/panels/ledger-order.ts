/** Sorting and filtering of the ledger. */
import { FINDINGS, type Row } from '../worker/protocol.ts';

export const LEDGER_COLUMNS = [
  'entry',
  'name',
  'formula',
  'letters',
  'relation',
  'finding',
  'firmness',
] as const;
export type LedgerColumn = (typeof LEDGER_COLUMNS)[number];

export interface LedgerQuery {
  readonly column: LedgerColumn;
  readonly descending: boolean;
  readonly words: string;
  readonly doubtfulOnly: boolean;
}

const URGENCY = new Map(FINDINGS.map((finding, k) => [finding, k]));

const collator = new Intl.Collator('en', { numeric: true, sensitivity: 'base' });

/** Compares rows by a column; rows without a value come last whichever way the column is sorted. */
function comparison(column: LedgerColumn, descending: boolean): (a: Row, b: Row) => number {
  const sign = descending ? -1 : 1;
  switch (column) {
    case 'entry':
      return (a, b) => sign * (a.index - b.index);
    case 'finding':
      return (a, b) => sign * (URGENCY.get(a.finding)! - URGENCY.get(b.finding)!) || a.index - b.index;
    case 'firmness':
      return (a, b) => {
        if (a.firmness === null || b.firmness === null) {
          return a.firmness === b.firmness ? a.index - b.index : a.firmness === null ? 1 : -1;
        }
        return sign * (a.firmness - b.firmness) || a.index - b.index;
      };
    case 'relation':
      return (a, b) => sign * collator.compare(a.relation ?? '', b.relation ?? '') || a.index - b.index;
    default:
      return (a, b) => sign * collator.compare(a[column], b[column]) || a.index - b.index;
  }
}

/** The rows asked for, in the order asked for. */
export function ledgerRows(rows: readonly Row[], query: LedgerQuery): readonly Row[] {
  const words = query.words
    .toLowerCase()
    .split(/\s+/u)
    .filter(word => word !== '');
  const kept = rows.filter(row => {
    if (query.doubtfulOnly && row.finding === 'none') return false;
    if (words.length === 0) return true;
    const text =
      `${row.entry} ${row.name} ${row.formula} ${row.letters} ${row.names} ${row.doubtful} ${row.relation ?? ''} ${row.finding}`.toLowerCase();
    return words.every(word => text.includes(word));
  });
  if (query.column === 'entry' && !query.descending) return kept;
  return kept.sort(comparison(query.column, query.descending));
}
