import type { Commissioning, Procedure } from '../scenario/commissioning.ts';
import type { Scenario } from '../scenario/scenario.ts';
import { clock, figure } from './figures.ts';

/** What a scenario states for `commission`, as understood; nothing where it states nothing. */
export function commissioningLines(s: Scenario): string[] {
  const c = s.commissioning;
  if (!c) return [];
  const lines = [
    ...c.procedures.map((p) => `  ${p.name}: ${procedureWords(s, p)}`),
    ...(c.samples
      ? [`  samples ${clock(c.samples.gap)} apart, repeatable to ${figure(100 * c.samples.repeatability)} %`]
      : []),
    ...(c.uncertain.length > 0
      ? [`  uncertain: ${c.uncertain.map((u) => `${u.path} ±${figure(100 * u.share, 2)} %`).join(', ')}`]
      : []),
    ...(c.prices ? [`  prices in ${c.prices.currency || 'no currency'}: ${priced(c).join(', ')}`] : []),
    ...(c.compare
      ? c.compare.columns.map(
          (q) =>
            `  ${q.times.length} plant samples of ${q.quantity}, ${clock(q.times[0])} to ${clock(q.times[q.times.length - 1])}`,
        )
      : []),
  ];
  return lines.length > 0 ? ['', 'Commissioning', ...lines] : [];
}

function procedureWords(s: Scenario, p: Procedure): string {
  const from = p.start === null ? [] : [`from ${typeof p.start === 'object' ? p.start.file : p.start}`];
  const filled = [
    ...p.tanks.map((q) => s.tanks[q.tank].name),
    ...p.trains.map((q) => s.trains[q.train].name),
  ];
  const moves = new Set(
    p.moves.map(
      (m) => `${m.words}, ${clock(m.at)} to ${m.lasts === null ? 'the end' : clock(m.at + m.lasts + m.over)}`,
    ),
  );
  return [...from, ...(filled.length > 0 ? [`${filled.join(', ')} filled otherwise`] : []), ...moves].join(
    '; ',
  );
}

const priced = ({ prices }: Commissioning): string[] =>
  prices === null
    ? []
    : [...prices.streams.keys(), ...prices.solutes.keys(), ...(prices.energy === null ? [] : ['energy'])];
