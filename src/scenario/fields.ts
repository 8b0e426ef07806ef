import { z } from 'zod';
import { guess } from './nearest.ts';
import { hidden, show } from './show.ts';
import { expected, type Kind, kinds, type Quantity, quantity } from './units.ts';

/** A figure as it was read, with what the user wrote. */
export type Figure = Quantity & { readonly text: string };

type Wrong = { readonly input?: unknown };

/** What was expected instead of a value, or of nothing. */
export const missing = (i: Wrong, wish: string): string =>
  i.input === undefined ? `is missing; ${wish}` : `${wish}, got ${show(i.input)}`;

/** A figure with its unit, read into what is used inside. `check` may refuse a value in its own words. */
export function figure(allowed: readonly Kind[], check?: (q: Quantity) => string | null) {
  const wish = expected(allowed[0]);
  return z
    .union([z.string(), z.number()], { error: (i) => missing(i, wish) })
    .transform((text, context): Figure => {
      const q = quantity(text, ...allowed);
      const wrong = 'wrong' in q ? q.wrong : check?.(q);
      if (!('wrong' in q) && !wrong) return { ...q, text: String(text) };
      const message = 'wrong' in q ? q.wrong : `${wrong}, got ${show(text)}`;
      context.addIssue({ code: 'custom', message });
      return z.NEVER;
    })
    .meta({
      description: `${allowed[0]}, such as ${kinds[allowed[0]].example}`,
      kinds: allowed,
    });
}

export const positive = (q: Quantity): string | null => (q.value > 0 ? null : 'must be greater than 0');
export const notNegative = (q: Quantity): string | null => (q.value >= 0 ? null : 'must not be negative');
export const between =
  (least: number, most: number, inWords = `${least} and ${most}`) =>
  (q: Quantity): string | null =>
    q.value > least && q.value < most ? null : `must lie between ${inWords}, neither of them included`;

export const number = (check = positive) => figure(['a plain number'], check);

const TEXT = 'expected a text';
/** A name; what is wrong with one is said where all names are checked. */
export const name = z.string({ error: (i) => missing(i, TEXT) });

/** A text of reasonable length without marks that move the cursor, except those that are allowed. */
export const text = (most = 1000, allowed = '') =>
  name.check((c) => {
    const message = wrongText(c.value, most, allowed);
    if (message !== null) c.issues.push({ code: 'custom', message, input: c.value });
  });

function wrongText(value: string, most: number, allowed: string): string | null {
  if (value.trim() === '') return 'must not be empty';
  if (value.length > most) return `has ${value.length} characters, more than ${most}`;
  const mark = hidden([...value].filter((m) => !allowed.includes(m)).join(''));
  return mark === null ? null : `must not hold the mark ${show(mark)}`;
}

export function oneOf(i: Wrong, words: readonly string[]): string {
  const near = typeof i.input === 'string' ? guess(i.input, words) : '';
  return missing(i, `expected one of ${words.join(', ')}`) + near;
}

export const word = <const T extends readonly [string, ...string[]]>(words: T) =>
  z.enum(words, { error: (i) => oneOf(i, words) });
export const phase = word(['aqueous', 'organic']);

export const either = z.boolean({ error: (i) => missing(i, 'expected true or false') });

const ARROW = "expected 'stream in -> stream out'";
export const arrow = z
  .string({ error: (i) => missing(i, ARROW) })
  .transform((t, context) => {
    const parts = t.split('->').map((p) => p.trim());
    if (parts.length === 2 && parts.every((p) => p !== '')) return { from: parts[0], to: parts[1] };
    context.addIssue({ code: 'custom', message: `${ARROW}, got ${show(t)}` });
    return z.NEVER;
  })
  .describe("two streams: 'what enters -> what leaves'");

export const whole = (least: number, most: number) => {
  const error = (i: Wrong): string => missing(i, `expected a whole number from ${least} to ${most}`);
  return z.int({ error }).min(least, { error }).max(most, { error });
};

/** Settings under names of the user's own. */
export const record = <T extends z.ZodType>(value: T, what: string) =>
  z.record(z.string(), value, { error: (i) => missing(i, `expected ${what}`) });

/** Settings under known names. */
export const object = <T extends z.ZodRawShape>(shape: T) =>
  z.strictObject(shape, {
    error: (i) => (i.code === 'invalid_type' ? missing(i, 'expected settings by name') : undefined),
  });

export const list = <T extends z.ZodType>(item: T, what: string) =>
  z.array(item, { error: (i) => missing(i, `expected ${what}`) });

/** A text or a number that is read once it is known what it stands for. */
export const later = (what: string) =>
  z.union([z.string(), z.number()], { error: (i) => missing(i, `expected ${what}`) });
