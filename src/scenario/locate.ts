import {
  isMap,
  isPair,
  isScalar,
  isSeq,
  type LineCounter,
  type Node,
  type Pair,
  type parseDocument,
} from 'yaml';
import type { Problem } from './refusal.ts';

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

type Document = ReturnType<typeof parseDocument>;

/** Line and column of the deepest node that a path still meets; of a key where the complaint is about the key. */
export function locate(doc: Document, lines: LineCounter, file: string, p: Problem): Located {
  let node: unknown = doc.contents;
  let best: unknown = node;
  for (let i = 0; i < p.path.length; i++) {
    const last = i === p.path.length - 1;
    if (isMap(node)) {
      const pair = node.items.find((q) => isScalar(q.key) && String(q.key.value) === String(p.path[i])) as
        | Pair
        | undefined;
      if (!pair) break;
      best = (last && p.atKey) || pair.value === null ? pair.key : pair.value;
      node = pair.value;
    } else if (isSeq(node)) {
      const item = node.items[p.path[i] as number];
      if (!item || isPair(item)) break;
      best = item;
      node = item;
    } else break;
  }
  const at = lines.linePos((best as Node | null)?.range?.[0] ?? 0);
  return {
    file,
    line: Math.max(1, at.line),
    column: Math.max(1, at.col),
    path: p.path.join('.'),
    message: p.message,
  };
}
