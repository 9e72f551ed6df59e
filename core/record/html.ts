/** The record as one HTML file that needs nothing else: for the screen, for print, for the archive. */
import { glyph } from './glyph.ts';
import type { EntryRecord, UnitRecord } from './json.ts';
import { ALARM, FAINT, INK, PAPER } from './palette.ts';
import {
  decidingRules,
  letterText,
  measured,
  number,
  type RecordFigure,
  type RecordMark,
  type Report,
  summarise,
  unitName,
} from './report.ts';
import { NOT_ESTABLISHED } from './statements.ts';

const STYLE = `
:root { color: ${INK}; background: ${PAPER}; font: 15px/1.45 "Source Sans 3", "Noto Sans", "DejaVu Sans", sans-serif; }
body { max-width: 62rem; margin: 2rem auto; padding: 0 1.5rem; }
h1 { font-size: 1.6rem; font-weight: 600; margin: 0 0 .2rem; }
h2 { font-size: 1.1rem; font-weight: 600; margin: 2rem 0 .5rem; border-top: 1px solid ${INK}; padding-top: .6rem; }
h3 { font-size: 1rem; font-weight: 600; margin: 1.4rem 0 .3rem; }
table { border-collapse: collapse; width: 100%; font-variant-numeric: tabular-nums; }
th, td { text-align: left; vertical-align: top; padding: .2rem .7rem .2rem 0; border-bottom: 1px solid color-mix(in srgb, ${FAINT} 40%, transparent); }
th { font-weight: 600; }
td.n { text-align: right; white-space: nowrap; }
code { font-family: "Source Code Pro", "DejaVu Sans Mono", monospace; font-size: .85em; overflow-wrap: anywhere; }
.dial { vertical-align: -5px; }
.inverted { color: ${ALARM}; font-weight: 600; }
.note { color: #55595f; }
figure { display: inline-block; margin: .6rem 1rem .6rem 0; break-inside: avoid; }
.sign { display: grid; grid-template-columns: 1fr 1fr; gap: 2.2rem 3rem; margin-top: 2.5rem; }
.sign div { border-top: 1px solid ${INK}; padding-top: .2rem; }
@media print { body { margin: 0; max-width: none; } section { break-inside: avoid-page; } }
`;

const escape = (text: string): string =>
  text.replace(/[&<>"]/gu, c => (c === '&' ? '&amp;' : c === '<' ? '&lt;' : c === '>' ? '&gt;' : '&quot;'));

/** Pieces of the document in order, so that a long record can be written as it is made. */
export function* htmlRecord(report: Report): Generator<string> {
  const summary = summarise(report.entries);
  yield `<!doctype html>\n<html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width"><title>${escape(report.title)}</title><style>${STYLE}</style></head><body>\n`;
  yield `<h1>${escape(report.title)}</h1>\n<p class="note">Deasil ${escape(report.version)}, <time datetime="${escape(report.date)}">${escape(report.date)}</time></p>\n`;
  yield '<h2>Summary</h2>\n<table>\n';
  yield row('Entries checked', `${summary.entries - summary.unreadable} of ${summary.entries}`);
  yield row('Stereogenic units', String(summary.units));
  for (const [verdict, count] of summary.verdicts) {
    yield `<tr><th scope="row"${verdict === 'inverted' ? ' class="inverted"' : ''}>${verdict}</th><td>${count}</td></tr>\n`;
  }
  if (summary.flat > 0) yield row('Coordinates do not decide', String(summary.flat));
  for (const [relation, count] of summary.relations) yield row(`Relation: ${relation}`, String(count));
  yield '</table>\n<h2>Input and settings</h2>\n<table>\n';
  for (const input of report.inputs) {
    const digest = input.sha256 === null ? 'no file' : `SHA-256 <code>${escape(input.sha256)}</code>`;
    yield `<tr><th scope="row">${input.role}</th><td>${escape(input.name)}<br>${digest}</td></tr>\n`;
  }
  const { settings } = report;
  yield row('Flat below firmness', String(settings.flatFirmness));
  yield row('Flat below', `${settings.flatSigmas} σ of the signed volume`);
  yield row('Largest digraph', `${settings.digraphLimit} nodes`);
  yield row('Labile units', settings.labileToo ? 'given letters' : 'marked, without letters');
  yield '</table>\n<h2>What this check does not establish</h2>\n<ul>\n';
  for (const sentence of NOT_ESTABLISHED) yield `<li>${escape(sentence)}</li>\n`;
  yield '</ul>\n<h2>Entries</h2>\n';
  const figures = groupBy(report.figures, figure => `${figure.file}\0${figure.entry}`);
  const marks = groupBy(report.marks, mark => String(mark.entry));
  for (const entry of report.entries) {
    yield entryHtml(
      entry,
      figures.get(`${entry.file}\0${entry.entry}`) ?? [],
      marks.get(String(entry.entry)) ?? [],
    );
  }
  yield '<div class="sign"><div>Checked by</div><div>Date</div><div>Reviewed by</div><div>Date</div></div>\n</body></html>\n';
}

function row(head: string, value: string): string {
  return `<tr><th scope="row">${escape(head)}</th><td>${escape(value)}</td></tr>\n`;
}

function groupBy<T>(items: readonly T[], key: (item: T) => string): Map<string, T[]> {
  const groups = new Map<string, T[]>();
  for (const item of items) {
    const at = key(item);
    const list = groups.get(at);
    if (list) list.push(item);
    else groups.set(at, [item]);
  }
  return groups;
}

function entryHtml(
  entry: EntryRecord,
  figures: readonly RecordFigure[],
  marks: readonly RecordMark[],
): string {
  const parts: string[] = [];
  const name = entry.name === '' ? '' : ` · ${escape(entry.name)}`;
  const relation =
    entry.relation === null
      ? ''
      : ` · <span${entry.relation === 'same' ? '' : ' class="inverted"'}>${entry.relation}</span>`;
  parts.push(`<section><h3>${escape(entry.file)} · entry ${entry.entry}${name}${relation}</h3>\n`);
  if (entry.error !== null) {
    const line = entry.error.line === null ? '' : ` (line ${entry.error.line})`;
    parts.push(`<p>${escape(entry.error.message)}${line}</p>\n`);
  }
  if (entry.difference !== undefined) parts.push(`<p>${escape(entry.difference)}</p>\n`);
  if (entry.units.length > 0) {
    parts.push(
      '<table><thead><tr><th></th><th>Unit</th><th>Kind</th><th>Found</th><th class="n">V / Å³</th><th class="n">τ / °</th><th class="n">Firmness</th><th>Rules</th><th>Intended</th><th>Verdict</th></tr></thead><tbody>\n',
    );
    entry.units.forEach((unit, u) => parts.push(unitRow(unit, marks.find(mark => mark.unit === u) ?? null)));
    parts.push('</tbody></table>\n');
  } else if (entry.error === null) parts.push('<p>No stereogenic units.</p>\n');
  for (const figure of figures) parts.push(`<figure>${figure.svg}</figure>\n`);
  for (const warning of entry.warnings) parts.push(`<p class="note">${escape(warning)}</p>\n`);
  parts.push('</section>\n');
  return parts.join('');
}

function unitRow(unit: UnitRecord, mark: RecordMark | null): string {
  const sign = glyph(unit, 20);
  const notes = [
    ...(unit.labile === undefined ? [] : [`labile: ${unit.labile}`]),
    ...(unit.distorted === undefined
      ? []
      : [`distorted: firmness ${number(unit.distorted.ideal, 2)} expected`]),
    ...(unit.warnings ?? []),
    ...(mark === null ? [] : [`${mark.mark}${mark.remark === '' ? '' : `: ${mark.remark}`}`]),
  ];
  const verdict =
    unit.verdict === 'inverted' ? '<span class="inverted">inverted</span>' : (unit.verdict ?? '–');
  const cells = [
    `<td>${sign}</td>`,
    `<td>${escape(unitName(unit))}</td>`,
    `<td>${unit.kind}</td>`,
    `<td>${escape(letterText(unit))}</td>`,
    `<td class="n">${measured(unit.signedVolume, unit.sigma, 2)}</td>`,
    `<td class="n">${measured(unit.torsion, unit.torsionSigma ?? null, 1)}</td>`,
    `<td class="n">${number(unit.firmness, 2)}</td>`,
    `<td>${decidingRules(unit)}</td>`,
    `<td>${unit.intended ?? '–'}</td>`,
    `<td>${verdict}</td>`,
  ];
  const note =
    notes.length === 0
      ? ''
      : `<tr><td></td><td colspan="9" class="note">${notes.map(escape).join('; ')}</td></tr>\n`;
  return `<tr>${cells.join('')}</tr>\n${note}`;
}
