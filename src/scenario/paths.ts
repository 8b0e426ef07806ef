import { quantitiesOf } from './limits.ts';
import { hint } from './nearest.ts';
import type { Outline } from './outline.ts';
import type { Problem } from './refusal.ts';
import type { Path } from './scenario.ts';
import { show } from './show.ts';

const STAGE = /^([^.]+)\.([^.]+)(\.mixer|\.mixer\.speed|\.continuity|\.settler\.aqueous_weir)?$/;

/** Paths in upsets and limits must lead somewhere. */
export function checkPaths(raw: Record<string, unknown>, plan: Outline, problems: Problem[]): void {
  if (!plan.whole || !plan.named) return;
  const check = (list: string, key: string, wrong: (path: string) => string | null): void => {
    const items = raw[list];
    if (!Array.isArray(items)) return;
    items.forEach((item, i) => {
      const value = (item as Record<string, unknown> | null)?.[key];
      const message = typeof value === 'string' ? wrong(value) : null;
      if (message !== null) problems.push({ path: [list, i, key], message });
    });
  };
  // Stages differ by a number alone, which no likeness of letters helps to find: the first stands for all.
  const ofStage = (k: string): string | undefined => STAGE.exec(k)?.[2];
  const trains = new Set(plan.trains.map((t) => t.name));
  const changeable = [...plan.changeable.keys()].filter(
    (k) => !trains.has(k.slice(0, k.indexOf('.'))) || ofStage(k) === '1',
  );
  const limitable = [...plan.limitable.keys()];
  const change = (path: string): string | null => {
    if (plan.changeable.has(path)) return null;
    const [, name, stage] = STAGE.exec(path) ?? [];
    const train = plan.trains.find((t) => t.name === name);
    if (train) return `no stage ${show(stage)}: ${train.name} has stages 1 to ${train.stages}`;
    const share = path.replace(/\.flow$/, '.share');
    if (share !== path && plan.changeable.has(share))
      return `${show(path)} follows from a share; change ${show(share)}`;
    if (plan.limitable.has(path))
      return `${show(path)} is a result and cannot be changed; change a feed, the flow of a tank or a mixer`;
    return `unknown quantity ${show(path)}${hint(path, changeable)}`;
  };
  check('upsets', 'change', change);
  check('variation', 'change', change);
  for (const { path, quantity } of movesOf(raw)) {
    const message = change(quantity);
    if (message !== null) problems.push({ path, message });
  }
  const result = (path: string): string | null => {
    const wrong = quantitiesOf(path, plan).find((q) => q !== null && !plan.limitable.has(q));
    return wrong == null ? null : `unknown quantity ${show(wrong)}${hint(wrong, limitable)}`;
  };
  check('limits', 'keep', result);
  for (const quantity of Object.keys(settings(settings(raw.compare).columns))) {
    const message = result(quantity);
    if (message !== null) problems.push({ path: ['compare', 'columns', quantity], message, atKey: true });
  }
}

type Settings = Record<string, unknown>;
const settings = (v: unknown): Settings =>
  typeof v === 'object' && v !== null && !Array.isArray(v) ? (v as Settings) : {};

/** What the moves of procedures and answers change, with their places. */
function movesOf(raw: Settings): { path: Path; quantity: string }[] {
  return (['procedures', 'answers'] as const).flatMap((key) =>
    Object.entries(settings(raw[key])).flatMap(([name, p]) => {
      const { moves } = settings(p);
      if (!Array.isArray(moves)) return [];
      return moves.flatMap((m, i) => {
        const { change } = settings(m);
        return typeof change === 'string'
          ? [{ path: [key, name, 'moves', i, 'change'], quantity: change }]
          : [];
      });
    }),
  );
}
