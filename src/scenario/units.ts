import type { Unit } from 'mathjs';
import bundle from 'mathjs/lib/browser/math.js';

/*
 * One own instance of the units engine. Its browser bundle is a single file: it loads in a tenth of the time that
 * the module tree takes.
 */
const math = bundle.create({});
math.createUnit('rpm', { definition: '1 min^-1' });
math.createUnit('cP', { definition: '1 mPa s' });
math.createUnit('M', { definition: '1 mol/L', prefixes: 'short' } as never);

/** What a figure can be; the unit is the one used inside. */
export const kinds = {
  'a flow by volume': 'm^3/s',
  'a flow by mass': 'kg/s',
  'a concentration': 'kg/m^3',
  'a molar concentration': 'mol/m^3',
  'a volume': 'm^3',
  'an area': 'm^2',
  'a length': 'm',
  'a time': 's',
  'a rate': 's^-1',
  'an affinity': 'm^3/kg',
  'a molar mass': 'kg/mol',
  'a mass ratio': '',
  'a mass fraction': '',
  'a percentage': '',
  'a plain number': '',
} as const;
export type Kind = keyof typeof kinds;

export const examples: Record<Kind, string> = {
  'a flow by volume': '420 m^3/h',
  'a flow by mass': '1200 kg/h',
  'a concentration': '5.2 g/L',
  'a molar concentration': '0.08 mol/L',
  'a volume': '42 m^3',
  'an area': '180 m^2',
  'a length': '0.35 m',
  'a time': '12 h 40 min',
  'a rate': '0.15 1/s',
  'an affinity': '1.2 L/g',
  'a molar mass': '63.55 g/mol',
  'a mass ratio': '0.01 kg/kg',
  'a mass fraction': '1 wt%',
  'a percentage': '94 %',
  'a plain number': '0.75',
};

export interface Quantity {
  readonly kind: Kind;
  /** In the unit of `kinds`. */
  readonly value: number;
}

export type Parsed = Quantity | { readonly wrong: string };

const NUMBER = /^[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?/;
const bases = new Map<Kind, Unit>();

/** Reads a figure with its unit as one of the kinds allowed, the first that fits. Never throws. */
export function quantity(text: unknown, ...allowed: Kind[]): Parsed {
  const expected = `expected ${allowed[0]} such as '${examples[allowed[0]]}'`;
  if (typeof text === 'number') {
    if (allowed.includes('a plain number')) return finite({ kind: 'a plain number', value: text }, text);
    return { wrong: `${expected}, got the bare number ${text}; write its unit` };
  }
  if (typeof text !== 'string') return { wrong: `${expected}, got ${show(text)}` };
  const t = normalise(text);
  if (/\d,\d/.test(t)) return { wrong: `'${text}': use a decimal point, not a comma` };
  const number = NUMBER.exec(t)?.[0];
  if (number === undefined) return { wrong: `${expected}, got '${text}'` };
  const unit = t.slice(number.length).trim();
  const special = specialUnit(Number(number), unit, allowed);
  if (special) return finite(special, text);
  if (allowed.includes('a time')) {
    const seconds = duration(t);
    if (seconds !== null) return finite({ kind: 'a time', value: seconds }, text);
  }
  if (unit === '') return { wrong: `${expected}, got '${text}' without a unit` };
  try {
    const u = math.unit(`${number} ${unit}`) as Unit;
    for (const kind of allowed) {
      if (kinds[kind] === '') continue;
      let base: Unit | undefined = bases.get(kind);
      if (!base) {
        base = math.unit(`1 ${kinds[kind]}`) as Unit;
        bases.set(kind, base);
      }
      if (u.equalBase(base)) return finite({ kind, value: u.toNumber(kinds[kind]) }, text);
    }
    return { wrong: `${expected}, got '${text}', which is something else` };
  } catch {
    return { wrong: `${expected}, got '${text}' with the unknown unit '${unit}'` };
  }
}

function finite(q: Quantity, text: unknown): Parsed {
  return Number.isFinite(q.value) ? q : { wrong: `${show(text)} is too large to be a figure` };
}

/** Units of shares, which have no dimension to tell them apart. */
function specialUnit(n: number, unit: string, allowed: readonly Kind[]): Quantity | null {
  const is = (kind: Kind, value: number): Quantity | null =>
    allowed.includes(kind) ? { kind, value } : null;
  switch (unit) {
    case '':
      return is('a plain number', n);
    case '%':
      return is('a percentage', n / 100) ?? is('a mass fraction', n / 100);
    case 'wt%':
    case 'wt %':
      return is('a mass fraction', n / 100);
    case 'ppm':
      return is('a mass fraction', n * 1e-6);
    case 'kg/kg':
    case 'g/g':
      return is('a mass ratio', n);
    case 'g/kg':
      return is('a mass ratio', n / 1e3);
    case 'mg/kg':
      return is('a mass ratio', n / 1e6);
    default:
      return null;
  }
}

/** `12 h 40 min` in seconds, or null. */
function duration(text: string): number | null {
  let rest = text.trim();
  let total = 0;
  let sign = 1;
  if (/^[+-]/.test(rest)) {
    sign = rest[0] === '-' ? -1 : 1;
    rest = rest.slice(1).trim();
  }
  while (rest !== '') {
    const m =
      /^(\d+\.?\d*(?:[eE][+-]?\d+)?)\s*(weeks?|days?|d|hours?|hr|h|minutes?|min|seconds?|sec|s)\b\s*/.exec(
        rest,
      );
    if (!m) return null;
    const unit = { w: 604800, d: 86400, h: 3600, m: 60, s: 1 }[m[2][0]] as number;
    total += Number(m[1]) * unit;
    rest = rest.slice(m[0].length);
  }
  return sign * total;
}

/** Writes what people type (superscripts, µ, middle dots, "1/s") in the way the units engine reads. */
function normalise(text: string): string {
  return text
    .trim()
    .replace(
      /[⁰¹²³⁴⁵⁶⁷⁸⁹⁻]+/g,
      (s) =>
        `^${[...s]
          .map((c) => '⁰¹²³⁴⁵⁶⁷⁸⁹⁻'.indexOf(c))
          .map((i) => (i === 10 ? '-' : i))
          .join('')}`,
    )
    .replace(/[µμ]/g, 'u')
    .replace(/[·⋅]/g, ' ')
    .replace(/−/g, '-')
    .replace(/\s1\/([A-Za-z]+)$/, ' $1^-1')
    .replace(/\s\/([A-Za-z]+)$/, ' $1^-1');
}

export const show = (value: unknown): string => {
  const text = typeof value === 'string' ? `'${value}'` : (JSON.stringify(value) ?? String(value));
  return text.length > 60 ? `${text.slice(0, 57)}…` : text;
};

/** Parses an expression with the general-purpose parser; only its syntax tree is used, nothing is evaluated. */
export const parseExpression = (text: string): unknown => math.parse(text);
