import { readFileSync, statSync } from 'node:fs';
import { isAbsolute, join } from 'node:path';
import Papa from 'papaparse';
import { hint } from './nearest.ts';
import { printable, shorten, show } from './show.ts';
import { type Kind, MOST, quantity } from './units.ts';

/** Bytes of a data file; a year by the minute has about 20 MB. */
const LARGEST = 200e6;
const SEPARATORS = [',', ';', '\t'];
const NUMBER = /^[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?$/;

export interface Table {
  readonly file: string;
  readonly header: readonly string[];
  /** Cells as text, and the line of the file on which each row begins. */
  readonly rows: readonly { readonly cells: readonly string[]; readonly line: number }[];
}

/** A data file could not be used; the message names the file and the line. */
export class BadData extends Error {}

/**
 * Reads a CSV file (comma, semicolon or tab; header in the first line).
 *
 * @throws BadData where it is missing, too large, not text, has no rows or a row of another length.
 */
export function readTable(folder: string, file: string): Table {
  const name = printable(shorten(file));
  const text = readText(folder, file, name).replace(/\r\n?/g, '\n').normalize('NFC');
  const garbled = /[\0\uFFFD]/.exec(text);
  if (garbled)
    throw new BadData(
      `${name}:${text.slice(0, garbled.index).split('\n').length}: is not text in UTF-8; save it as CSV`,
    );
  const parsed = Papa.parse<string[]>(text, { delimiter: separator(text), newline: '\n' });
  let next = 1;
  const lines = parsed.data.map((cells) => {
    const line = next;
    // A cell in quotes may run over several lines.
    next += 1 + cells.reduce((n, c) => n + c.split('\n').length - 1, 0);
    return { cells, line };
  });
  const quote = parsed.errors.find((e) => e.type === 'Quotes');
  if (quote)
    throw new BadData(
      `${name}:${lines[quote.row ?? 0]?.line ?? next}: a quotation mark is not closed, or stands within a cell; take it out or double it`,
    );
  const filled = lines.filter((r) => r.cells.some((c) => c.trim() !== ''));
  const header = filled[0]?.cells.map((c) => c.trim());
  if (!header || filled.length < 2)
    throw new BadData(`${name}:1: no rows below the header; put the data there`);
  for (const r of filled)
    if (r.cells.length !== header.length)
      throw new BadData(
        `${name}:${r.line}: expected ${header.length} cells as in the header, got ${r.cells.length}; look for commas within figures`,
      );
  return { file: name, header, rows: filled.slice(1) };
}

function readText(folder: string, file: string, name: string): string {
  const path = isAbsolute(file) ? file : join(folder, file);
  try {
    const about = statSync(path);
    if (!about.isFile()) throw new BadData(`${name} is not a file; name a CSV file`);
    if (about.size > LARGEST)
      throw new BadData(
        `${name} has ${(about.size / 1e6).toFixed(0)} MB, more than ${LARGEST / 1e6}; leave out what is not needed`,
      );
    return readFileSync(path, 'utf8').replace(/^\uFEFF/, '');
  } catch (e) {
    if (e instanceof BadData) throw e;
    throw new BadData(`cannot read ${name} (looked for it beside the scenario); look at its name and place`);
  }
}

/** The separator that the header uses most. */
function separator(text: string): string {
  const header = text
    .trimStart()
    .split('\n', 1)[0]
    .replace(/"[^"]*"/g, '');
  const count = (c: string): number => header.split(c).length;
  return SEPARATORS.reduce((best, c) => (count(c) > count(best) ? c : best));
}

/** @throws BadData where no column has that header, or two have. */
export function columnIndex(t: Table, name: string): number {
  const at = t.header.indexOf(name.trim());
  if (at < 0) throw new BadData(`${t.file}:1: no column ${show(name)}${hint(name, t.header)}`);
  if (t.header.lastIndexOf(name.trim()) > at)
    throw new BadData(`${t.file}:1: two columns are called ${show(name)}; rename one`);
  return at;
}

/** A column as numbers. @throws BadData naming the line of a cell that is no number. */
export function numbers(t: Table, column: number): number[] {
  return t.rows.map(({ cells, line }) => {
    const cell = cells[column].trim();
    const value = Number(cell);
    if (NUMBER.test(cell) && Math.abs(value) <= MOST) return value;
    const comma = /^[+-]?\d+,\d+$/.test(cell) ? '; use a decimal point, not a comma' : '';
    throw new BadData(
      `${t.file}:${line}: expected a number in column ${show(t.header[column])}, got ${show(cell)}${comma}`,
    );
  });
}

/** The same, with null where a cell is blank: a value that is missing. */
export function optionalNumbers(t: Table, column: number): (number | null)[] {
  const filled = { ...t, rows: t.rows.filter(({ cells }) => cells[column].trim() !== '') };
  const values = numbers(filled, column);
  let next = 0;
  return t.rows.map(({ cells }) => (cells[column].trim() === '' ? null : values[next++]));
}

const HEADERS: Partial<Record<Kind, string>> = {
  'a time': 'time [h]',
  'a flow by volume': 'feed [m^3/h]',
  'a concentration': 'Cu [g/L]',
};

/** The unit that a header ends in, `Cu g/L` or `Cu [g/L]`, and the factor and kind that it stands for. */
export function headerUnit(t: Table, column: number, ...allowed: Kind[]): { kind: Kind; factor: number } {
  const header = t.header[column];
  const bracket = /[[(]([^\])]+)[\])]\s*$/.exec(header)?.[1];
  const words = header.split(/\s+/);
  const tries = bracket ? [bracket] : words.map((_, i) => words.slice(i).join(' '));
  for (const unit of tries) {
    const q = quantity(`1 ${unit}`, ...allowed);
    if (!('wrong' in q) && q.kind !== 'a plain number') return { kind: q.kind, factor: q.value };
  }
  const example = HEADERS[allowed[0]] ?? HEADERS['a concentration'];
  throw new BadData(
    `${t.file}:1: the header ${show(header)} must end in a unit for ${allowed[0]}, such as '${example}'`,
  );
}

/** Elapsed seconds of each row: by the unit in the header, or from ISO 8601 time stamps, counted from the first. */
export function elapsed(t: Table, column: number): number[] {
  const stamps = t.rows.map(({ cells }) => cells[column].trim());
  const times = /^\d{4}-\d{2}-\d{2}/.test(stamps[0]) ? fromStamps(t, stamps) : inUnits(t, column);
  for (let i = 1; i < times.length; i++)
    if (!(times[i] > times[i - 1]))
      throw new BadData(
        `${t.file}:${t.rows[i].line}: time must rise from row to row, got ${show(stamps[i])} after ${show(stamps[i - 1])}; sort the rows`,
      );
  return times;
}

function inUnits(t: Table, column: number): number[] {
  const { factor } = headerUnit(t, column, 'a time');
  return numbers(t, column).map((v) => v * factor);
}

const STAMP = /^(\d{4}-\d{2}-\d{2})(?:[T ](\d{2}:\d{2}(?::\d{2}(?:\.\d+)?)?)(Z|[+-]\d{2}:?\d{2})?)?$/i;

/** ms of the first time stamp of a column, without a zone taken as UTC; null where the column holds no stamps. */
export function stamped(t: Table, column: number): number | null {
  const first = t.rows[0].cells[column].trim();
  if (!/^\d{4}-\d{2}-\d{2}/.test(first)) return null;
  const [, day, time = '00:00', zone = 'Z'] = STAMP.exec(first) ?? [];
  return Date.parse(`${day}T${time}${zone}`);
}

/** Stamps without a zone are taken as they stand: only differences count, and no plant clock is known here. */
function fromStamps(t: Table, stamps: readonly string[]): number[] {
  const ms = stamps.map((s, i) => {
    const [, day, time = '00:00', zone = 'Z'] = STAMP.exec(s) ?? [];
    const value = Date.parse(`${day}T${time}${zone}`);
    if (Number.isFinite(value)) return value;
    throw new BadData(
      `${t.file}:${t.rows[i].line}: expected a time stamp such as 2026-03-01T06:00, got ${show(s)}`,
    );
  });
  return ms.map((v) => (v - ms[0]) / 1e3);
}
