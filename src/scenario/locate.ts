import { isAlias, isMap, isPair, isScalar, isSeq, type LineCounter, type Node } from 'yaml';
import type { Document } from './document.ts';
import type { Slip } from './inspect.ts';
import type { Problem } from './refusal.ts';
import type { Path } from './scenario.ts';
import { printable, shorten } from './show.ts';

/** A complaint with its place, as it is shown. */
export interface Located {
  readonly file: string;
  readonly line: number;
  readonly column: number;
  readonly path: string;
  readonly message: string;
}

export const format = (l: Located): string =>
  `${l.file}:${l.line}:${l.column} ${l.path === '' ? '' : `${l.path}: `}${l.message}`;

/** A place in the text as line and column; a path in the way it is shown. */
export function place(lines: LineCounter, file: string, { offset, path, message }: Slip): Located {
  const at = lines.linePos(offset);
  return {
    file,
    line: Math.max(1, at.line),
    column: Math.max(1, at.col),
    path: path.map((step) => printable(shorten(String(step)))).join('.'),
    message,
  };
}

/** A problem at the deepest node that its path still meets; at the key where the complaint is about the key. */
export function locate(document: Document, lines: LineCounter, file: string, p: Problem): Located {
  return place(lines, file, { offset: offsetOf(document, p.path, p.atKey ?? false), ...p });
}

function offsetOf(document: Document, path: Path, atKey: boolean): number {
  let node: unknown = document.contents;
  let best = node;
  for (const [i, step] of path.entries()) {
    if (isAlias(node)) node = node.resolve(document);
    if (isMap(node)) {
      const pair = node.items.find((q) => isScalar(q.key) && String(q.key.value) === String(step));
      if (!pair) break;
      best = (i === path.length - 1 && atKey) || isNothing(pair.value) ? pair.key : pair.value;
      node = pair.value;
    } else if (isSeq(node)) {
      const item = node.items[step as number];
      if (!item || isPair(item)) break;
      best = item;
      node = item;
    } else break;
  }
  return (best as Node | null)?.range?.[0] ?? 0;
}

/** The place of a value that is not there is that of its key. */
const isNothing = (value: unknown): boolean =>
  value === null || (isScalar(value) && value.value === null && (value.source ?? '') === '');
