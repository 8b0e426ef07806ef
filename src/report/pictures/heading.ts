import type { Shade } from '../../study/upsets.ts';
import { figure } from '../figures.ts';

/** Characters that a line of the heading holds. */
export const WIDEST = 150;

/** Pieces of text put together on lines that the heading holds. */
export function packed(pieces: readonly string[]): string[] {
  const lines: string[] = [];
  for (const piece of pieces) {
    const last = lines[lines.length - 1];
    if (last !== undefined && last.length + 2 + piece.length <= WIDEST)
      lines[lines.length - 1] = `${last}; ${piece}`;
    else lines.push(piece);
  }
  return lines;
}

/** Upsets by the numbers that stand in the picture. */
export const upsetWords = (
  shades: readonly Shade[],
  unit: { readonly name: string; readonly seconds: number },
): string[] =>
  shades.map(
    (q, i) =>
      `${i + 1}: ${q.words}, ${figure(q.from / unit.seconds)} to ${figure(q.to / unit.seconds)} ${unit.name}`,
  );
