/** Marks that move the cursor, turn the writing direction or cannot be seen. */
const HIDDEN = /[\p{Cc}\p{Cf}\p{Zl}\p{Zp}]/gu;
/** Characters of a value that a message repeats. */
const LONGEST = 60;

/** A text that does nothing to a terminal and hides nothing from the reader. */
export const printable = (text: string): string =>
  text.replace(HIDDEN, (c) => `\\u${(c.codePointAt(0) as number).toString(16).padStart(4, '0')}`);

/** The first mark of a text that cannot be seen, or null. */
export const hidden = (text: string): string | null => text.match(HIDDEN)?.[0] ?? null;

export const shorten = (text: string): string => {
  const characters = [...text.slice(0, 2 * LONGEST)];
  return characters.length > LONGEST ? `${characters.slice(0, LONGEST - 1).join('')}…` : text;
};

/** A value of the file as messages repeat it. */
export function show(value: unknown): string {
  if (value === undefined || value === null) return 'nothing';
  if (typeof value === 'string') return `'${printable(shorten(value))}'`;
  if (typeof value === 'object') return printable(shorten(JSON.stringify(value)));
  return String(value);
}
