import { readFileSync, statSync } from 'node:fs';
import { isAbsolute, join } from 'node:path';
import Papa from 'papaparse';
import { hint } from './nearest.ts';
import { type Kind, quantity, show } from './units.ts';

/** Bytes of a data file; a year by the minute has about 20 MB. */
const LARGEST = 200e6;

export interface Table {
  readonly file: string;
  readonly header: readonly string[];
  /** Cells as text, and the line of the file on which each row stands. */
  readonly rows: readonly { readonly cells: readonly string[]; readonly line: number }[];
}

/** A data file could not be used; the message names the file and the line. */
export class BadData extends Error {}

/**
 * Reads a CSV file (comma, semicolon or tab; header in the first line).
 *
 * @throws BadData where it is missing, too large, has no rows or a row of another length.
 */
export function readTable(folder: string, file: string): Table {
  const path = isAbsolute(file) ? file : join(folder, file);
  let text: string;
  try {
    const about = statSync(path);
    if (!about.isFile()) throw new BadData(`${file} is not a file`);
    if (about.size > LARGEST)
      throw new BadData(`${file} has ${(about.size / 1e6).toFixed(0)} MB, more than ${LARGEST / 1e6}`);
    text = readFileSync(path, 'utf8');
  } catch (e) {
    if (e instanceof BadData) throw e;
    throw new BadData(`cannot read ${file} (looked for it beside the scenario)`);
  }
  const parsed = Papa.parse<string[]>(text.replace(/^\uFEFF/, ''), { skipEmptyLines: false });
  const quote = parsed.errors.find((e) => e.type === 'Quotes');
  if (quote) throw new BadData(`${file}:${(quote.row ?? 0) + 1}: ${quote.message.toLowerCase()}`);
  const lines = parsed.data
    .map((cells, i) => ({ cells, line: i + 1 }))
    .filter((r) => r.cells.some((c) => c.trim() !== ''));
  const header = lines[0]?.cells.map((c) => c.trim());
  if (!header || lines.length < 2) throw new BadData(`${file} holds no rows below its header`);
  for (const r of lines)
    if (r.cells.length !== header.length)
      throw new BadData(
        `${file}:${r.line}: expected ${header.length} cells as in the header, got ${r.cells.length}`,
      );
  return { file, header, rows: lines.slice(1) };
}

/** @throws BadData where no column has that header. */
export function columnIndex(t: Table, name: string): number {
  const at = t.header.indexOf(name.trim());
  if (at < 0) throw new BadData(`${t.file}:1: no column '${name}'${hint(name, t.header)}`);
  return at;
}

/** A column as numbers. @throws BadData naming the line of a cell that is no number. */
export function numbers(t: Table, column: number): number[] {
  return t.rows.map(({ cells, line }) => {
    const cell = cells[column].trim();
    const value = Number(cell);
    if (cell === '' || !Number.isFinite(value))
      throw new BadData(
        `${t.file}:${line}: expected a number in column '${t.header[column]}', got ${show(cell)}`,
      );
    return value;
  });
}

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
  throw new BadData(
    `${t.file}:1: the header '${header}' must end in a unit for ${allowed[0]}, such as 'Cu g/L'`,
  );
}

/** Elapsed seconds of each row: by the unit in the header, or from ISO 8601 time stamps, counted from the first. */
export function elapsed(t: Table, column: number): number[] {
  const stamps = t.rows.map(({ cells }) => cells[column].trim());
  const times = /^\d{4}-\d{2}-\d{2}/.test(stamps[0]) ? fromStamps(t, stamps) : inUnits(t, column);
  for (let i = 1; i < times.length; i++)
    if (!(times[i] > times[i - 1]))
      throw new BadData(
        `${t.file}:${t.rows[i].line}: time must rise from row to row, got ${show(stamps[i])} after ${show(stamps[i - 1])}`,
      );
  return times;
}

function inUnits(t: Table, column: number): number[] {
  const { factor } = headerUnit(t, column, 'a time');
  return numbers(t, column).map((v) => v * factor);
}

function fromStamps(t: Table, stamps: readonly string[]): number[] {
  const ms = stamps.map((s, i) => {
    const value = Date.parse(/[zZ]|[+-]\d{2}:?\d{2}$/.test(s) ? s : `${s.replace(' ', 'T')}Z`);
    if (!Number.isFinite(value))
      throw new BadData(
        `${t.file}:${t.rows[i].line}: expected a time stamp such as 2026-03-01T06:00, got ${show(s)}`,
      );
    return value;
  });
  return ms.map((v) => (v - ms[0]) / 1e3);
}
