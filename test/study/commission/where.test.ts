import { describe, expect, test } from 'vitest';
import { assemble } from '../../../src/plant/assemble.ts';
import { commission } from '../../../src/study/commission/commission.ts';
import { Keeper } from '../../../src/study/commission/kept.ts';
import { run } from '../../../src/study/run.ts';
import { scenario } from '../../support/plants.ts';

const exact = { integrator: 'rodas5p', tolerance: 1e-9 } as const;

describe('where the slowest mode lives', () => {
  test('is where, late in the run, the copper is that is still missing', () => {
    const s = { ...scenario('saltbush-copper'), upsets: [] };
    const { modes, followed } = commission(s, exact);
    const [slow] = modes;
    expect(slow.of).toBe('copper');
    expect(slow.period).toBeNull();
    expect(slow.lives.reduce((sum, q) => sum + q.share, 0)).toBeCloseTo(1, 12);
    // At eight slowest decays only that mode is left: the next one falls four times as fast.
    const t = 8 * slow.time;
    const keeper = new Keeper([t]);
    run({ ...s, horizon: t }, { ...exact, watchers: [keeper] });
    const { state } = keeper.kept.get(t) as { state: Float64Array };
    const rest = (followed.rest as { state: Float64Array }).state;
    const { places } = assemble(s).system;
    const groups: [string, (path: string) => boolean][] = [
      ['organic tank', (p) => p.startsWith('organic tank.')],
      ['mixers of extraction', (p) => /^extraction\.\d\.mixer/.test(p)],
      ['organic layers of extraction', (p) => /^extraction\.\d\.settler\.\d\.organic/.test(p)],
      ['aqueous layers of extraction', (p) => /^extraction\.\d\.settler\.\d\.aqueous/.test(p)],
      ['mixers of strip', (p) => /^strip\.\d\.mixer/.test(p)],
      ['organic layers of strip', (p) => /^strip\.\d\.settler\.\d\.organic/.test(p)],
      ['aqueous layers of strip', (p) => /^strip\.\d\.settler\.\d\.aqueous/.test(p)],
    ];
    const missing = groups.map(([, own]) =>
      places.reduce(
        (sum, p, i) =>
          p.kind === 'amount' && p.path.endsWith('.copper') && own(p.path)
            ? sum + Math.abs(rest[i] - state[i])
            : sum,
        0,
      ),
    );
    const all = missing.reduce((a, b) => a + b, 0);
    groups.forEach(([name], k) => {
      const share = slow.lives.find((q) => q.where === name)?.share;
      expect(Math.abs((share as number) - missing[k] / all), name).toBeLessThan(0.002);
    });
    expect(slow.lives).toHaveLength(groups.length);
    expect(slow.lives.map((q) => q.share)).toEqual(slow.lives.map((q) => q.share).sort((a, b) => b - a));
  });
});
