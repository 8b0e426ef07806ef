import { duration } from './duration.ts';
import { show } from './show.ts';
import { engine } from './units-engine.ts';

/** What a figure can be: the unit used inside (none for shares and plain numbers), and how it is written. */
export const kinds = {
  'a flow by volume': { unit: 'm^3/s', example: '420 m^3/h' },
  'a flow by mass': { unit: 'kg/s', example: '1200 kg/h' },
  'a concentration': { unit: 'kg/m^3', example: '5.2 g/L' },
  'a molar concentration': { unit: 'mol/m^3', example: '0.08 mol/L' },
  'a volume': { unit: 'm^3', example: '42 m^3' },
  'an area': { unit: 'm^2', example: '180 m^2' },
  'a length': { unit: 'm', example: '0.35 m' },
  'a time': { unit: 's', example: '12 h 40 min' },
  'a rate': { unit: 's^-1', example: '0.15 1/s' },
  'an affinity': { unit: 'm^3/kg', example: '1.2 L/g' },
  'a viscosity': { unit: 'Pa s', example: '1.1 mPa s' },
  'a surface tension': { unit: 'N/m', example: '25 mN/m' },
  'a diffusivity': { unit: 'm^2/s', example: '7e-10 m^2/s' },
  'a specific flow': { unit: 'm/s', example: '2.4 m/h' },
  'a molar mass': { unit: 'kg/mol', example: '63.55 g/mol' },
  'a volume fraction': { unit: '', example: '50 ppm' },
  'a mass ratio': { unit: '', example: '0.01 kg/kg' },
  'a mass fraction': { unit: '', example: '1 wt%' },
  'a percentage': { unit: '', example: '94 %' },
  'a plain number': { unit: '', example: '0.75' },
} as const;
export type Kind = keyof typeof kinds;

export interface Quantity {
  readonly kind: Kind;
  /** In the unit of `kinds`. */
  readonly value: number;
}

export type Parsed = Quantity | { readonly wrong: string };

export const expected = (kind: Kind): string => `expected ${kind} such as '${kinds[kind].example}'`;

const NUMBER = /^[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?/;

/** Units of which two or three kinds are in use. */
const UNCLEAR = [
  [/\btons?\b/, 't for 1000 kg'],
  [/\bgal(lons?)?\b/, 'L'],
] as const;

/*
 * Figures outside of this belong to no plant: they are slips of an exponent, and products of a few of them leave the
 * range of the arithmetic. Time ends after a century.
 */
const LEAST = 1e-12;
export const MOST = 1e12;
const CENTURY = 100 * 365.25 * 86400;

/** Reads a figure with its unit as one of the kinds allowed, the first that fits. Never throws. */
export function quantity(text: unknown, ...allowed: Kind[]): Parsed {
  const wish = expected(allowed[0]);
  if (typeof text === 'number') {
    if (allowed.includes('a plain number')) return within({ kind: 'a plain number', value: text }, text);
    if (Number.isFinite(text)) return { wrong: `${wish}, got the bare number ${text}; write its unit` };
  }
  if (typeof text !== 'string') return { wrong: `${wish}, got ${show(text)}` };
  const t = normalise(text);
  if (/\d,\d/.test(t)) return { wrong: `${show(text)}: use a decimal point, not a comma` };
  const number = NUMBER.exec(t)?.[0];
  if (number === undefined) return { wrong: `${wish}, got ${show(text)}` };
  const unit = t.slice(number.length).trim();
  const shares = shareUnit(Number(number), unit);
  const share = shares.find((q) => allowed.includes(q.kind));
  if (share) return within(share, text);
  if (unit === '') return { wrong: `${wish}, got ${show(text)} without a unit` };
  if (shares.length > 0) return { wrong: `${wish}, got ${show(text)}, ${shares[0].kind}` };
  const unclear = UNCLEAR.find(([pattern]) => pattern.test(unit));
  if (unclear) return { wrong: `${show(text)}: this unit has several meanings; write ${unclear[1]}` };
  if (allowed.includes('a time')) {
    const seconds = duration(t);
    if (seconds !== null) return within({ kind: 'a time', value: seconds }, text);
  }
  const u = parseUnit(unit);
  if (!u && allowed[0] === 'a time')
    return { wrong: `${wish}, got ${show(text)}; its units are d, h, min, s` };
  if (!u) return { wrong: `${wish}, got ${show(text)} with the unknown unit ${show(unit)}` };
  const fits = allowed.find((kind) => u.is(kind));
  if (fits) return within({ kind: fits, value: scale(Number(number), u.factor(fits)) }, text);
  const other = (Object.keys(kinds) as Kind[]).find((kind) => u.is(kind));
  return { wrong: `${wish}, got ${show(text)}, ${other ?? 'which is something else'}` };
}

/**
 * A number times the factor of its unit. A factor of which the inverse is whole is divided by: 420 m³/h are 420/3600
 * m³/s however they are written, and 5.2 g/L are 5.2 kg/m³ to the last bit.
 */
function scale(value: number, factor: number): number {
  const inverse = Math.round(1 / factor);
  return inverse >= 1 && Math.abs(inverse * factor - 1) < 1e-12 ? value / inverse : value * factor;
}

function within(q: Quantity, text: unknown): Parsed {
  const size = Math.abs(q.value);
  const unit = kinds[q.kind].unit && ` ${kinds[q.kind].unit}`;
  const [most, inWords] = q.kind === 'a time' ? [CENTURY, '100 years'] : [MOST, `1e12${unit}`];
  if (!(size <= most))
    return { wrong: `${show(text)} is too large for a plant (more than ${inWords}); look at its unit` };
  if (size > 0 && size < LEAST)
    return { wrong: `${show(text)} is too small for a plant (less than ${LEAST}${unit}); look at its unit` };
  return q;
}

/** A unit that was understood: whether it measures a kind, and how much of the unit used inside it is. */
interface Measure {
  is(kind: Kind): boolean;
  factor(kind: Kind): number;
}

/*
 * Units that scenarios are written in, as the units engine gives them (a test holds that): most files need no other,
 * and reading them does not wait for the engine.
 */
export const commonUnits: Readonly<Record<string, readonly [kind: Kind, factor: number]>> = {
  'm^3/h': ['a flow by volume', 1 / 3600],
  'm^3/s': ['a flow by volume', 1],
  'L/min': ['a flow by volume', 1e-3 / 60],
  'L/h': ['a flow by volume', 1e-3 / 3600],
  'L/s': ['a flow by volume', 1e-3],
  'kg/h': ['a flow by mass', 1 / 3600],
  'g/L': ['a concentration', 1],
  'mg/L': ['a concentration', 1e-3],
  'kg/m^3': ['a concentration', 1],
  'mol/L': ['a molar concentration', 1000],
  'm^3': ['a volume', 1],
  L: ['a volume', 1e-3],
  'm^2': ['an area', 1],
  m: ['a length', 1],
  cm: ['a length', 0.01],
  mm: ['a length', 1e-3],
  's^-1': ['a rate', 1],
  'min^-1': ['a rate', 1 / 60],
  rpm: ['a rate', 1 / 60],
  'L/g': ['an affinity', 1],
  'mPa s': ['a viscosity', 1e-3],
  'mN/m': ['a surface tension', 1e-3],
  'm^2/s': ['a diffusivity', 1],
  'm/h': ['a specific flow', 1 / 3600],
  'g/mol': ['a molar mass', 1e-3],
};

function parseUnit(unit: string): Measure | null {
  const common = Object.hasOwn(commonUnits, unit) ? commonUnits[unit] : null;
  if (common) return { is: (kind) => kind === common[0], factor: () => common[1] };
  const u = engine().parse(`1 ${unit}`);
  if (u === null) return null;
  return {
    is: (kind) => kinds[kind].unit !== '' && u.equalBase(engine().base(kinds[kind].unit)),
    factor: (kind) => u.toNumber(kinds[kind].unit),
  };
}

/** What a figure with a unit of shares can mean: those have no dimension to tell them apart. */
function shareUnit(n: number, unit: string): Quantity[] {
  const ratio = (divisor: number): Quantity[] => [{ kind: 'a mass ratio', value: n / divisor }];
  const fraction = (divisor: number): Quantity[] => [
    { kind: 'a mass fraction', value: n / divisor },
    { kind: 'a volume fraction', value: n / divisor },
  ];
  switch (unit) {
    case '':
      return [{ kind: 'a plain number', value: n }];
    case '%':
      return [{ kind: 'a percentage', value: n / 100 }, ...fraction(100)];
    case 'wt%':
    case 'wt %':
      return [{ kind: 'a mass fraction', value: n / 100 }];
    case 'ppm':
      return fraction(1e6);
    case 'kg/kg':
    case 'g/g':
      return ratio(1);
    case 'g/kg':
      return ratio(1e3);
    case 'mg/kg':
      return ratio(1e6);
    default:
      return [];
  }
}

const RAISED = '⁰¹²³⁴⁵⁶⁷⁸⁹⁻';

/** Writes what people type (superscripts, µ, middle dots, `m3`, `1/s`) in the way the units engine reads. */
function normalise(text: string): string {
  return text
    .trim()
    .replace(/\s+/g, ' ')
    .replace(/[⁰¹²³⁴⁵⁶⁷⁸⁹⁻]+/g, (s) => `^${[...s].map((c) => '0123456789-'[RAISED.indexOf(c)]).join('')}`)
    .replace(/[µμ]/g, 'u')
    .replace(/[·⋅]/g, ' ')
    .replace(/−/g, '-')
    .replace(/(?<![A-Za-z])([dcm]?m)([23])\b/g, '$1^$2')
    .replace(/ per /g, '/')
    .replace(/\s1\/([A-Za-z]+)$/, ' $1^-1')
    .replace(/\s\/([A-Za-z]+)$/, ' $1^-1');
}

/** Parses an expression with the general-purpose parser; only its syntax tree is used, nothing is evaluated. */
export const parseExpression = (text: string): unknown => engine().expression(text);
