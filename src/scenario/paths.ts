import { quantitiesOf } from './limits.ts';
import { hint } from './nearest.ts';
import type { Outline } from './outline.ts';
import type { Problem } from './refusal.ts';
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
  check('upsets', 'change', (path) => {
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
  });
  check('limits', 'keep', (path) => {
    const wrong = quantitiesOf(path, plan).find((q) => q !== null && !plan.limitable.has(q));
    return wrong == null ? null : `unknown quantity ${show(wrong)}${hint(wrong, limitable)}`;
  });
}
