import {
  type Alias,
  isAlias,
  isMap,
  isScalar,
  isSeq,
  type Node,
  type Pair,
  type parseDocument,
  type YAMLMap,
} from 'yaml';
import type { Path } from './scenario.ts';
import { show } from './show.ts';

/** Something wrong with the writing of a file, at an offset into its text. */
export interface Slip {
  readonly offset: number;
  readonly path: Path;
  readonly message: string;
}

/** Levels of settings within settings; a scenario has eight. */
const DEEPEST = 40;
const NO_MERGE = "'<<' does not merge settings in YAML 1.2; write them out, or use an alias for all of them";

/**
 * What YAML lets through and a scenario does not: keys that stand twice or are no texts, merge keys, aliases that
 * lead nowhere or into themselves, bottomless nesting. The last two make a document unusable as plain data; the
 * keys are taken out or made texts, so that the rest can be read.
 */
export class Inspection {
  readonly slips: Slip[] = [];
  unusable = false;
  readonly #anchors = new Set<string>();

  constructor(document: ReturnType<typeof parseDocument>) {
    this.#walk(document.contents, [], []);
  }

  #complain(node: unknown, path: Path, message: string): void {
    this.slips.push({ offset: (node as Node | null)?.range?.[0] ?? 0, path, message });
  }

  /** `open`: the anchors of all that holds this node. */
  #walk(node: unknown, path: Path, open: readonly string[]): void {
    if (isAlias(node)) {
      this.#alias(node, path, open);
      return;
    }
    const anchor = (node as { anchor?: string } | null)?.anchor;
    if (anchor !== undefined) this.#anchors.add(anchor);
    const within = anchor === undefined ? open : [...open, anchor];
    if (path.length > DEEPEST) {
      this.unusable = true;
      this.#complain(node, [], `nested more than ${DEEPEST} levels deep`);
    } else if (isSeq(node))
      node.items.forEach((item, i) => {
        this.#walk(item, [...path, i], within);
      });
    else if (isMap(node)) this.#settings(node, path, within);
  }

  #alias(node: Alias, path: Path, open: readonly string[]): void {
    const name = node.source;
    if (this.#anchors.has(name) && !open.includes(name)) return;
    this.unusable = true;
    const message = open.includes(name)
      ? `*${name} stands for something that holds it`
      : `*${name} stands for nothing: no &${name} comes before it`;
    this.#complain(node, path, message);
  }

  #settings(map: YAMLMap, path: Path, open: readonly string[]): void {
    const settings = new Map<string, Pair>();
    for (const pair of map.items) {
      const key = this.#key(pair, path);
      if (key === null) continue;
      const own = [...path, key];
      if (settings.has(key)) this.#complain(pair.key, own, `the key ${show(key)} stands here twice`);
      settings.set(key, pair);
      this.#walk(pair.value, own, open);
    }
    map.items = [...settings.values()];
  }

  /** A key as text, or null where it cannot be one. */
  #key({ key, value }: Pair, path: Path): string | null {
    if (!isScalar(key) || key.value === null) {
      this.#complain(
        isScalar(key) && key.source === '' ? value : key,
        path,
        'a key is a text, such as title',
      );
      return null;
    }
    if (key.anchor !== undefined) this.#anchors.add(key.anchor);
    if (typeof key.value !== 'string') {
      const text = String(key.source ?? key.value);
      this.#complain(key, path, `a key is a text: write ${show(text)} in quotes`);
      key.value = text;
    }
    const text = key.value as string;
    if (text !== '<<' && text !== '__proto__') return text;
    this.#complain(key, [...path, text], text === '<<' ? NO_MERGE : "'__proto__' cannot be a key");
    return null;
  }
}
