import { describe, expect, it } from 'vitest';
import { headerUnit } from '../../src/scenario/csv.ts';
import { commonUnits, type Kind, kinds, quantity } from '../../src/scenario/units.ts';
import { engine } from '../../src/scenario/units-engine.ts';

/** The value of a figure, or what is wrong with it. */
const read = (text: unknown, ...allowed: Kind[]): number | string => {
  const q = quantity(text, ...allowed);
  return 'wrong' in q ? q.wrong : q.value;
};

describe('figures that mean the same are the same to the last bit', () => {
  const same: readonly (readonly [Kind, number, readonly string[]])[] = [
    [
      'a flow by volume',
      420 / 3600,
      [
        '420 m^3/h',
        '420m^3/h',
        '420 m3/h',
        '420m3/h',
        '420 m³/h',
        '420 m³·h⁻¹',
        '420 m^3 h^-1',
        '420 m^3 per h',
        '420\u00a0m³/h',
        '+420 m^3/h',
        '4.2e2 m^3/h',
        '420000 L/h',
        '420000 l/h',
        '420000 dm3/h',
        '7000 L/min',
        '7 m^3/min',
        '10080 m^3/day',
      ],
    ],
    [
      'a concentration',
      5.2,
      [
        '5.2 g/L',
        '5.2g/L',
        '5.2 kg/m^3',
        '5.2 kg/m³',
        '5.2 g/dm³',
        '5200 mg/L',
        '5200 g/m^3',
        '5.2 g·L⁻¹',
        '5.2 mg/mL',
      ],
    ],
    ['a molar concentration', 80, ['0.08 mol/L', '80 mol/m3', '0.08 M', '80 mM', '0.08 kmol/m^3']],
    ['a volume', 42, ['42 m^3', '42 m3', '42 m³', '42000 L', '42e3 l']],
    ['an area', 180, ['180 m^2', '180 m2', '180 m²', '1.8e6 cm^2']],
    ['a length', 0.35, ['0.35 m', '35 cm', '350 mm', '.35 m', '350000 µm', '350000 μm', '350000 um']],
    [
      'a rate',
      0.15,
      [
        '0.15 1/s',
        '0.15 /s',
        '0.15/s',
        '0.15 s^-1',
        '0.15 s⁻¹',
        '0.15 per s',
        '9 1/min',
        '540 1/h',
        '9 rpm',
        '150 mHz',
      ],
    ],
    ['an affinity', 1.2, ['1.2 L/g', '1.2 m^3/kg', '1200 mL/g', '0.0012 m^3/g']],
    ['a molar mass', 0.06355, ['63.55 g/mol', '0.06355 kg/mol', '63.55 kg/kmol']],
    ['a flow by mass', 1 / 3.6, ['1 t/h', '1000 kg/h', '24 t/day', '24 tonne/day']],
    ['a percentage', 0.94, ['94 %', '94%', '94.0 %', '9.4e1 %']],
    ['a mass fraction', 0.01, ['1 wt%', '1 wt %', '1 %', '10000 ppm']],
    ['a mass ratio', 0.01, ['0.01 kg/kg', '0.01 g/g', '10 g/kg', '10000 mg/kg']],
    ['a plain number', 0.75, ['0.75', '.75', '+0.75', '7.5e-1']],
    [
      'a time',
      45600,
      [
        '12 h 40 min',
        '12h 40min',
        '12h40min',
        '760 min',
        '45600 s',
        '12 hours 40 minutes',
        '12 hrs 40 mins',
        '+12 h 40 min',
        '0.5 d 40 min',
      ],
    ],
    ['a time', 12 * 7 * 86400, ['12 weeks', '84 d', '84 days', '2016 h']],
    ['a time', 0.5, ['500 ms', '0.5 s']],
    ['a time', -300, ['-5 min', '−5 min', '-300 s']],
  ];
  it.each(same.map(([kind, value, texts]) => ({ kind, value, texts })))(
    '$kind $value',
    ({ kind, value, texts }) => {
      for (const text of texts) {
        const got = read(text, kind);
        expect(got, text).toBeTypeOf('number');
        // Only where neither the factor nor its inverse is whole may the last bit differ.
        expect(Math.abs((got as number) / value - 1), text).toBeLessThan(3e-16);
      }
    },
  );

  it('exactly where the factor or its inverse is whole', () => {
    for (const text of ['5.2 g/L', '5200 mg/L', '5.2 kg/m^3'])
      expect(read(text, 'a concentration')).toBe(5.2);
    for (const text of ['420 m^3/h', '7000 L/min']) expect(read(text, 'a flow by volume')).toBe(420 / 3600);
    expect(read('35 cm', 'a length')).toBe(0.35);
    expect(read('94 %', 'a percentage')).toBe(0.94);
  });
});

describe('what a figure is', () => {
  it('is the first kind allowed that fits', () => {
    const content: Kind[] = ['a concentration', 'a molar concentration', 'a mass ratio', 'a mass fraction'];
    const kindOf = (text: string): string => {
      const q = quantity(text, ...content);
      return 'wrong' in q ? q.wrong : q.kind;
    };
    expect(kindOf('5 g/L')).toBe('a concentration');
    expect(kindOf('5 mol/L')).toBe('a molar concentration');
    expect(kindOf('5 g/kg')).toBe('a mass ratio');
    expect(kindOf('5 wt%')).toBe('a mass fraction');
    expect(kindOf('5 ppm')).toBe('a mass fraction');
    expect(quantity('70 %', 'a percentage', 'a volume')).toEqual({ kind: 'a percentage', value: 0.7 });
    expect(quantity('70 m^3', 'a percentage', 'a volume')).toEqual({ kind: 'a volume', value: 70 });
  });

  /** A percent sign is a percentage or a fraction, ppm are of mass or of volume. */
  const asThePlaceAsks = (kind: Kind, other: Kind): boolean =>
    (kind.endsWith('fraction') && other === 'a percentage') ||
    (kind === 'a mass fraction' && other === 'a volume fraction');

  it('every kind reads its own example and refuses all examples of other kinds', () => {
    const names = Object.keys(kinds) as Kind[];
    for (const kind of names) {
      const own = quantity(kinds[kind].example, kind);
      expect(own).toMatchObject({ kind });
      for (const other of names) {
        if (other === kind || asThePlaceAsks(kind, other)) continue;
        expect(read(kinds[other].example, kind), `${kinds[other].example} as ${kind}`).toMatch(
          new RegExp(`expected ${kind} such as`),
        );
      }
    }
  });

  it('a figure of another kind is called by its name', () => {
    expect(read('420 kg/m^3', 'a flow by volume')).toMatch(/'420 kg\/m\^3', a concentration$/);
    expect(read('90 %', 'a volume')).toMatch(/'90 %', a percentage$/);
    expect(read('10 g/kg', 'a concentration')).toMatch(/'10 g\/kg', a mass ratio$/);
    expect(read('1 degC', 'a time')).toMatch(/'1 degC', which is something else$/);
  });
});

describe('figures that are refused', () => {
  it.each([
    ['', 'a volume'],
    [' ', 'a volume'],
    ['m^3', 'a volume'],
    ['.', 'a plain number'],
    ['+', 'a plain number'],
    ['1e', 'a plain number'],
    ['½ L', 'a volume'],
    ['９ L', 'a volume'],
    ['0x10 m^3', 'a volume'],
    ['1_000 m^3', 'a volume'],
    ['1 000 m^3', 'a volume'],
    ['1.2.3 m^3', 'a volume'],
    ['1e5e5 m^3', 'a volume'],
    ['5 m^3 2', 'a volume'],
    ['5 m^3;', 'a volume'],
    ['5 m^3 # cubic', 'a volume'],
    ['5 (m^3', 'a volume'],
    [`5 ${'('.repeat(5000)}m`, 'a volume'],
    [`5 ${'m*'.repeat(3000)}m`, 'a volume'],
    ['5 constructor', 'a volume'],
    ['5 __proto__', 'a volume'],
    ['1/2 h', 'a time'],
    ['1 h 30', 'a time'],
    ['1 h -5 min', 'a time'],
    ['12:30', 'a time'],
    ['- 5 min', 'a time'],
    ['h', 'a time'],
    ['∞ h', 'a time'],
  ] as const)('%s as %s', (text, kind) => {
    const said = read(text, kind);
    expect(said).toMatch(new RegExp(`^expected ${kind} such as '`));
    expect((said as string).length).toBeLessThan(260);
  });

  it.each([null, undefined, true, [1], { a: 1 }, Number.NaN, Number.POSITIVE_INFINITY])('%s', (value) => {
    expect(read(value, 'a volume')).toMatch(/^expected a volume such as '42 m\^3', got /);
  });

  it('beyond what any plant has', () => {
    expect(read('1e12 m^3', 'a volume')).toBe(1e12);
    expect(read('1.1e12 m^3', 'a volume')).toMatch(/too large for a plant \(more than 1e12 m\^3\)/);
    expect(read('1e-12 m^3', 'a volume')).toBe(1e-12);
    expect(read('1e-13 m^3', 'a volume')).toMatch(/too small for a plant \(less than 1e-12 m\^3\)/);
    expect(read('0 m^3', 'a volume')).toBe(0);
    expect(read('1e999 m^3', 'a volume')).toMatch(/too large/);
    expect(read(1e13, 'a plain number')).toMatch(/too large/);
    expect(read('100 years', 'a time')).toBe(100 * 365.25 * 86400);
    expect(read('36526 d', 'a time')).toMatch(/more than 100 years/);
  });

  it('units of several meanings', () => {
    for (const text of ['5 ton/h', '5 tons/h'])
      expect(read(text, 'a flow by mass')).toMatch(/write t for 1000 kg/);
    for (const text of ['5 gal/min', '5 gallon/h']) expect(read(text, 'a flow by volume')).toMatch(/write L/);
  });
});

describe('headers of columns', () => {
  const table = (header: string): Parameters<typeof headerUnit>[0] => ({
    file: 't.csv',
    header: [header],
    rows: [],
  });

  it.each([
    ['Cu g/L', 1],
    ['Cu [g/L]', 1],
    ['Cu (g/L)', 1],
    ['copper in liquor mg/L', 1e-3],
    ['copper (grade) [mg/L]', 1e-3],
    ['Cu kg/m³', 1],
  ])('%s', (header, factor) => {
    expect(headerUnit(table(header), 0, 'a concentration')).toEqual({ kind: 'a concentration', factor });
  });

  it.each(['Cu', 'g', 'Cu [h]', 'Cu []', '[g/L] Cu', ''])('%s ends in no unit of concentration', (header) => {
    expect(() => headerUnit(table(header), 0, 'a concentration')).toThrow(
      /t\.csv:1: the header .* must end in a unit/,
    );
  });
});

describe('units that are read without the engine', () => {
  it.each(Object.entries(commonUnits))(
    '%s is what the engine makes of it (mathjs)',
    (unit, [kind, factor]) => {
      const u = engine().parse(`1 ${unit}`);
      expect(u?.equalBase(engine().base(kinds[kind].unit))).toBe(true);
      expect(Math.abs((u?.toNumber(kinds[kind].unit) ?? Number.NaN) / factor - 1)).toBeLessThan(1e-15);
    },
  );
});
