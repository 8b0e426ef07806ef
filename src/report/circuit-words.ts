import type { Plant } from '../plant/assemble.ts';
import type { Maker, User } from '../scenario/network.ts';
import type { Branch, Scenario, Train } from '../scenario/scenario.ts';
import { figure } from './figures.ts';

/** Who makes or takes a stream, in words. */
export function endWords(s: Scenario, e: Maker | User | null): string {
  if (e === null) return 'outlet';
  switch (e.kind) {
    case 'feed':
      return 'feed';
    case 'tank':
      return s.tanks[e.index].name;
    case 'train':
      return s.trains[e.index].name;
    case 'split':
      return `split of ${s.splits[e.index].stream}`;
    case 'blend':
      return `blend ${s.blends[e.index].name}`;
    default:
      return `${s.trains[e.index].name}.${e.stage + 1}`;
  }
}

const takeWords = ({ name, take }: Branch): string =>
  'share' in take
    ? `${figure(100 * take.share)} % as ${name}`
    : `${figure(3600 * take.flow)} m^3/h as ${name}`;

/** How streams divide and what is not the usual way of a train, as understood. */
export function settingLines({ scenario: s, designs }: Plant): string[] {
  const splits = s.splits.map(
    (q) => `  ${q.stream} divides: ${q.branches.map(takeWords).join(', ')}, the rest as ${q.rest}`,
  );
  const draws = s.trains.flatMap((t) =>
    t.stages.flatMap((q, j) => q.draws.map((d) => `  ${t.name}.${j + 1} gives ${takeWords(d)} (${d.phase})`)),
  );
  const removals = s.tanks.flatMap((t) =>
    t.removes.flatMap((r, i) => {
      if (r === null) return [];
      const how = 'rate' in r.how ? `${figure(3600 * r.how.rate)} kg/h` : `${figure(100 * r.how.share)} %`;
      return [`  ${t.name} takes out ${how} of ${s.solutes[i]}`];
    }),
  );
  const base = s.feeds.flatMap((f) =>
    s.species.flatMap((n, k) => {
      const c = f.content[s.solutes.length + k];
      return c < 0 ? [`  ${f.name} neutralises ${figure(-c)} g/L of ${n}`] : [];
    }),
  );
  const trains = s.trains.flatMap((t, i) =>
    arrangementLines(
      t,
      designs[i].stages.map((d) => (100 * d.mixer.organic) / (d.mixer.aqueous + d.mixer.organic)),
    ),
  );
  const batches = s.batches.map(
    (b) =>
      `  ${b.name}: ${figure(1000 * b.mixer.volume)} L stirred without flow, O/A ${figure(b.organicShare / (1 - b.organicShare))}`,
  );
  const all = [...splits, ...draws, ...removals, ...base, ...trains, ...batches];
  return all.length > 0 ? ['', 'Arrangement', ...all] : [];
}

/** `organic`: the organic share that each mixer holds, in %. */
function arrangementLines(t: Train, organic: readonly number[]): string[] {
  const { arrangement: a, backFlow: b } = t;
  const lines: string[] = [];
  if (a.kind === 'co-current') lines.push(`  ${t.name}: co-current, both phases enter stage 1`);
  if (a.kind === 'cross-current')
    lines.push(
      `  ${t.name}: cross-current, the ${a.fresh} enters every stage fresh, ${a.fresh === 'aqueous' ? 'while the organic passes from the last stage to the first, ' : ''}${a.shares.map((v) => figure(100 * v)).join(' / ')} %`,
    );
  if (t.stages[0].settler.parts === 0) {
    const [least, most] = [figure(Math.min(...organic)), figure(Math.max(...organic))];
    lines.push(
      `  ${t.name}: without settlers, ${least === most ? least : `${least} to ${most}`} % organic held; back-flow ${figure(100 * b.aqueous)} % aqueous, ${figure(100 * b.organic)} % organic`,
    );
  }
  return lines;
}
