import { isScalar, LineCounter, parseDocument, type YAMLError } from 'yaml';
import { Inspection, type Slip } from './inspect.ts';
import { show } from './show.ts';

/** Characters of a scenario file; the largest sensible plant stays far below. */
const LONGEST = 1_000_000;
/** Uses of anchors by anchors, multiplied: far above any plant, far below what fills the memory. */
const MOST_ALIASES = 10_000;

export type Document = ReturnType<typeof parseDocument>;

/** A file that is YAML and holds settings by name. */
export interface Parsed {
  readonly document: Document;
  readonly lines: LineCounter;
  readonly raw: Record<string, unknown>;
  /** What is wrong with the writing but lets the rest be read: keys that stand twice, tags, merge keys. */
  readonly slips: readonly Slip[];
}

/** YAML 1.2 text → document and plain data, or what hinders it. Never throws. */
export function parse(
  text: string,
  lines: LineCounter = new LineCounter(),
): Parsed | { readonly slips: readonly Slip[]; readonly lines: LineCounter } {
  const refuse = (message: string, offset = 0): { slips: Slip[]; lines: LineCounter } => ({
    slips: [{ offset, path: [], message }],
    lines,
  });
  if (text.length > LONGEST)
    return refuse(`the file has ${text.length} characters, more than ${LONGEST}; move data to CSV files`);
  const garbled = /[\0\uFFFD]/.exec(text);
  if (garbled) {
    for (const start of text.matchAll(/^/gm)) lines.addNewLine(start.index);
    return refuse('the file is not text in UTF-8; save it as such', garbled.index);
  }
  let document: Document;
  try {
    document = parseDocument(text, {
      lineCounter: lines,
      prettyErrors: false,
      version: '1.2',
      resolveKnownTags: false,
      uniqueKeys: false,
      // Not 'silent': a second document would then go unnoticed.
      logLevel: 'error',
    });
  } catch (e) {
    return refuse(e instanceof RangeError ? TOO_DEEP : `not YAML: ${(e as Error).message}`);
  }
  const { errors, warnings, directives, contents } = document;
  if (errors.length > 0) return { slips: leading(errors.map(inOurWords), lines), lines };
  if (contents === null || (isScalar(contents) && contents.value === null))
    return refuse('the file is empty; a scenario needs at least title, solutes, feeds, trains, horizon');
  if (directives?.yaml.explicit && directives.yaml.version !== '1.2')
    return refuse('a scenario is YAML 1.2; take out the line that begins with %YAML');
  const inspected = new Inspection(document);
  const slips = [...warnings.map(inOurWords), ...inspected.slips];
  if (inspected.unusable) return { slips, lines };
  let raw: unknown;
  try {
    raw = document.toJS({ maxAliasCount: MOST_ALIASES });
  } catch {
    // An anchor may have gone with a key that was complained about.
    if (slips.length > 0) return { slips, lines };
    return refuse(
      'the aliases (*name) of the file unfold to more than any plant needs; write out what they stand for',
    );
  }
  if (typeof raw !== 'object' || raw === null || Array.isArray(raw))
    return refuse(`expected settings by name (title: …), got ${show(raw)}`);
  return { document, lines, raw: raw as Record<string, unknown>, slips };
}

const TOO_DEEP = 'the file is nested too deeply; look for brackets that are not closed';

function inOurWords(e: YAMLError): Slip {
  const of = (message: string): Slip => ({ offset: e.pos[0], path: [], message });
  switch (e.code) {
    case 'RESOURCE_EXHAUSTION':
      return of(TOO_DEEP);
    case 'MULTIPLE_DOCS':
      return of('one plant a file: a second YAML document begins here; take it out');
    case 'TAB_AS_INDENT':
      return of('not YAML: indent with spaces, not with tabs');
    case 'BLOCK_AS_IMPLICIT_KEY':
      return of('not YAML: a second colon in one line; write a text that holds one in quotes');
    case 'TAG_RESOLVE_FAILED':
      return of('a scenario has no tags (words that begin with !); take it out');
    default:
      return of(/call stack/.test(e.message) ? TOO_DEEP : `not YAML: ${e.message}`);
  }
}

/** The first of each line, since one slip upsets the rest of its line; and one level too deep is enough. */
function leading(slips: readonly Slip[], lines: LineCounter): Slip[] {
  const tooDeep = slips.find((s) => s.message === TOO_DEEP);
  if (tooDeep) return [tooDeep];
  const seen = new Set<number>();
  return slips.filter(({ offset }) => {
    const { line } = lines.linePos(offset);
    return !seen.has(line) && seen.add(line);
  });
}
