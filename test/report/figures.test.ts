import { describe, expect, it } from 'vitest';
import { clock, columns, figure, withUnit } from '../../src/report/figures.ts';

describe('figures for people', () => {
  it.each([
    [0, '0'],
    [0.71984, '0.720'],
    [50.449, '50.4'],
    [4900.1, '4900'],
    [0.0757576, '0.0758'],
    [-2.5, '-2.50'],
    [1.234e-6, '1.23e-6'],
    [9.996, '10.00'],
  ])('%d is written %s', (value, text) => {
    expect(figure(value)).toBe(text);
  });

  it.each([
    [25, '25 s'],
    [2400, '40 min'],
    [3600, '1 h'],
    [64440, '17 h 54 min'],
    [3599.9, '1 h'],
    [6 * 86400 + 7200, '6 d 2 h'],
    [-2400, '-40 min'],
  ])('%d s is said %s', (seconds, text) => {
    expect(clock(seconds)).toBe(text);
  });

  it('turns SI into the unit shown', () => {
    expect(withUnit(0.116666, 'm^3/s')).toBe('420 m^3/h');
    expect(withUnit(0.6, 'kg/m^3')).toBe('0.600 g/L');
  });

  it('lines columns up', () => {
    expect(
      columns([
        ['a', '1'],
        ['long', '22'],
      ]),
    ).toEqual(['  a      1', '  long  22']);
  });
});
