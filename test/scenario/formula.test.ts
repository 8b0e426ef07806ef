import { describe, expect, it } from 'vitest';
import { FUNCTIONS, parseFormula } from '../../src/scenario/formula.ts';
import type { Formula } from '../../src/scenario/scenario.ts';
import { answer, type Complaint, expectRefusal, instead } from './wrong.ts';

/** A formula worked out by plain recursion over its parts. */
function value(f: Formula, names: Readonly<Record<string, number>>): number {
  if (f.kind === 'number') return f.value;
  if (f.kind === 'name') return names[f.name];
  const args = f.args.map((a) => value(a, names));
  const [a, b] = args;
  switch (f.op) {
    case '+':
      return b === undefined ? a : a + b;
    case '-':
      return b === undefined ? -a : a - b;
    case '*':
      return a * b;
    case '/':
      return a / b;
    case '^':
      return a ** b;
    case 'ln':
      return Math.log(a);
    default:
      return (Math[f.op as 'exp'] as (...list: number[]) => number)(...args);
  }
}

function worth(text: string | number, names: Readonly<Record<string, number>> = { c_a: 2 }): number {
  const parsed = parseFormula(text, Object.keys(names));
  if ('wrong' in parsed) throw new Error(parsed.wrong);
  return value(parsed.formula, names);
}

const refused = (text: unknown): string => {
  const parsed = parseFormula(text, ['c_a', 'acid']);
  return 'wrong' in parsed ? parsed.wrong : '(taken)';
};

describe('formulas', () => {
  it('mean what arithmetic means', () => {
    expect(worth('18*c_a/(1 + 0.9*c_a)')).toBe(36 / 2.8);
    expect(worth('-c_a^2')).toBe(-4);
    expect(worth('2^-c_a')).toBe(0.25);
    expect(worth('2^3^c_a')).toBe(2 ** 9);
    expect(worth('10 - 4 - c_a')).toBe(4);
    expect(worth('12/3/c_a')).toBe(2);
    expect(worth('+c_a')).toBe(2);
    expect(worth('1e3*.5*c_a')).toBe(1000);
    expect(worth('pi*e')).toBeCloseTo(Math.PI * Math.E, 14);
    expect(worth(3)).toBe(3);
    expect(worth('k_1*Säure/β', { k_1: 6, Säure: 2, β: 3 })).toBe(4);
  });

  it('call every function that is listed', () => {
    const at = 0.7;
    const plain: Record<string, number> = { ln: Math.log(at), min: at, max: 3, log10: Math.log10(at) };
    for (const f of FUNCTIONS) {
      const text = f === 'min' || f === 'max' ? `${f}(c_a, 3)` : `${f}(c_a)`;
      const direct = plain[f] ?? (Math[f as 'exp'](at) as number);
      expect(worth(text, { c_a: at }), f).toBeCloseTo(direct, 14);
    }
  });

  it('tell which names they use', () => {
    const parsed = parseFormula('k*c_a + k', ['c_a', 'acid', 'k']);
    expect('names' in parsed && [...parsed.names].sort()).toEqual(['c_a', 'k']);
  });

  it('a name of their own wins over a number of the same name', () => {
    expect(worth('e', { e: 5 })).toBe(5);
  });
});

describe('what a formula must not do', () => {
  it.each([
    'import({a: 1})',
    'createUnit("zzz")',
    'evaluate("2+3")',
    'parse("2")',
    'compile("2")',
    'simplify("2")',
    'derivative("c_a", "c_a")',
    'config({})',
    'cos(c_a)',
    'constructor(c_a)',
    'toString(c_a)',
    'c_a(3)',
  ])('call: %s', (text) => {
    expect(refused(text)).toMatch(/is not a function for formulas; there are exp, log, /);
  });

  it.each([
    'c_a.constructor',
    'x.constructor',
    'c_a["constructor"]',
    'c_a[1]',
    'f(y) = y',
    'c_a = 5',
    '"a"',
    "'a'",
    '[1, 2]',
    '{a: 1}',
    'c_a ? 1 : 2',
    'c_a; c_a',
    'c_a\nc_a',
    '1:3',
    'true',
    'null',
    'undefined',
    '5 cm',
    'c_a.constructor("return 1")',
  ])('hold: %s', (text) => {
    expect(refused(text)).toMatch(/nothing else$|write a multiplication with \*$|is not a function/);
  });

  it.each([
    'c_a!',
    'c_a % 2',
    'c_a to g',
    'c_a in m',
    'not c_a',
    'c_a and 1',
    'c_a | 1',
    'c_a > 1',
    "c_a'",
    'c_a .^ 2',
    'c_a << 2',
  ])('use the operator: %s', (text) => {
    expect(refused(text)).toMatch(/^the operator '.+' is not for formulas; there are|nothing else$/);
  });

  it.each(['2 c_a', '2c_a', '2(c_a)', '1e3c_a', '(c_a)(c_a)', 'c_a acid'])(
    'multiply without a sign: %s',
    (text) => {
      expect(refused(text)).toBe('write a multiplication with *');
    },
  );

  it.each([
    ['exp()', 'exp takes one argument, got 0'],
    ['exp(1, 2)', 'exp takes one argument, got 2'],
    ['min(c_a)', 'min takes two or more arguments, got 1'],
    ['coper', "unknown name 'coper' in the formula; known here: c_a, acid"],
    ['acidd', "unknown name 'acidd' in the formula; did you mean 'acid'?"],
    ['C_a', "unknown name 'C_a' in the formula; did you mean 'c_a'?"],
    ['__proto__', "unknown name '__proto__'"],
    ['constructor', "unknown name 'constructor'"],
    ['Infinity', 'not finite'],
    ['NaN', 'not finite'],
    ['1e400', 'not finite'],
    ['exp(c_a', 'not a formula (at character 8)'],
    ['c_a +', 'not a formula (at character'],
    ['*c_a', 'not a formula (at character 1)'],
    ['３', 'not a formula (at character 1)'],
    ['', 'expected a formula such as'],
    ['  ', 'expected a formula such as'],
    ['x'.repeat(501), '500 characters, this has 501'],
    [`${'('.repeat(200)}c_a${')'.repeat(200)}`, 'nested too deeply (more than 60 levels)'],
    [`${'-'.repeat(400)}c_a`, 'nested too deeply'],
    [Number.NaN, 'expected a formula'],
    [Number.POSITIVE_INFINITY, 'expected a formula'],
    [null, 'got nothing'],
    [['c_a'], 'got ["c_a"]'],
  ])('be %s', (text, words) => {
    expect(refused(text)).toContain(words);
  });
});

describe('formulas in a scenario', () => {
  const law = (organic: string, more = ''): string =>
    instead('{law: ratio, ratio: 3}', `{law: formula, organic: ${JSON.stringify(organic)}${more}}`);
  const ORGANIC = '14:51 trains.extraction.equilibrium.copper.organic';
  const cases: readonly (readonly [string, string, ...Complaint[]])[] = [
    ['3*copper', '', [ORGANIC, "unknown name 'copper'", 'copper itself is called c_a']],
    ['k*c_a', ', constants: {m: 3}', [ORGANIC, "unknown name 'k'", 'c_a, acid, m']],
    ['c_a + 1', '', [ORGANIC, 'passes through 0, 0', '1 g/L']],
    ['-c_a', '', [ORGANIC, 'rises', 'slope of the formula is -1']],
  ];
  it.each(cases.map(([organic, more, ...complaints]) => ({ organic, more, complaints })))(
    '$organic with ($more)',
    (c) => {
      expectRefusal(law(c.organic, c.more), c.complaints);
    },
  );

  it.each(['c_a', 'pi', 'e', 'acid', 'toString', 'constructor'])('a constant is not called %s', (name) => {
    const [line, ...more] = answer(law('3*c_a', `, constants: {${name}: 3}`));
    expect(more).toEqual([]);
    expect(line).toContain(`constants.${name}: '${name}' has another meaning in a formula`);
  });

  it.each(['k 1', '1k', 'k-1', '""'])('a constant is not called %s either', (name) => {
    const [line] = answer(law('3*c_a', `, constants: {${name}: 3}`));
    expect(line).toContain('a constant is called by letters, digits and _');
  });

  it('call what is dissolved by its letters', () => {
    const species = (list: string, organic: string): readonly string[] =>
      answer(
        instead(
          'species: [acid]',
          `species: [acid, ${list}]`,
          'acid: 1.8 g/L',
          `acid: 1.8 g/L, ${list}: 1 g/L`,
          '{law: ratio, ratio: 3}',
          `{law: formula, organic: ${JSON.stringify(organic)}}`,
        ),
      );
    expect(species('free base', 'c_a*free_base')).toEqual([]);
    expect(species('Säure', 'c_a*Säure')).toEqual([]);
    expect(species('2-ethyl', 'c_a*_2_ethyl')).toEqual([]);
    expect(species('free base', 'c_a*free')[0]).toContain("did you mean 'free_base'?");
  });

  it('a name that can mean two components is refused where it is used', () => {
    const twice = (organic: string): readonly string[] =>
      answer(
        instead(
          'species: [acid]',
          'species: [acid, a b, a-b]',
          '{law: ratio, ratio: 3}',
          `{law: formula, organic: "${organic}"}`,
        ),
      );
    expect(twice('c_a*2')).toEqual([]);
    expect(twice('c_a*(1 + a_b)')[0]).toContain(
      "14:51 trains.extraction.equilibrium.copper.organic: 'a_b' can mean two",
    );
  });
});
