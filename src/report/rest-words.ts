import type { Loop } from '../scenario/loops.ts';
import type { Limit } from '../scenario/scenario.ts';
import type { Checked } from '../study/check/check.ts';
import type { LoopSense } from '../study/check/loop-sense.ts';
import { clock, columns, figure, withUnit } from './figures.ts';
import { gainText, outputText } from './loop-words.ts';

/** s within which a tank that gains or loses asks for something to be done: a month. */
const SOON = 30 * 86400;
/** A share below this is told as less than it. */
const LEAST_SHARE = 1e-4;

/** The plant at rest in a table: what each train does, how full the organic is, and what drives it. */
export function restTable(c: Checked): string[] {
  const { trains } = c.plant.scenario;
  if (c.restless !== null && trains.length > 0) return ['', 'At rest', `  ${c.restless}`];
  const rows = c.figures.flatMap((f) =>
    f.solutes.map((q) => {
      const own = c.factors.find((x) => x.train === f.train && x.solute === q.solute);
      const known = own?.stages.filter((v): v is number => v !== null) ?? [];
      const range = known.length === 0 ? '-' : span(known);
      return [
        f.train,
        q.solute,
        `${share(q.recovery)} ${q.transferred >= 0 ? 'extracted' : 'stripped'}`,
        q.load === null ? '-' : `${share(q.load)} of full`,
        `${figure(q.netTransfer)} g/L`,
        own?.extracts === false ? `stripping ${range}` : `extraction ${range}`,
      ];
    }),
  );
  if (rows.length === 0) return [];
  return [
    '',
    'At rest, with the inputs of time zero',
    ...columns([['train', 'solute', 'recovery', 'organic loaded', 'net transfer', 'factor'], ...rows]),
  ];
}

const share = (v: number): string => (v < LEAST_SHARE ? '< 0.01 %' : `${figure(100 * v)} %`);

function span(list: readonly number[]): string {
  const [low, high] = [figure(Math.min(...list)), figure(Math.max(...list))];
  return low === high ? low : `${low} to ${high}`;
}

/** What a limit has in hand at rest: `; at rest 0.312 g/L, 48 % in hand`. */
export function limitAtRest({ side, value: limit }: Limit, value: number | null, unit: string): string {
  if (value === null) return '';
  const spare = side === 'below' ? limit - value : value - limit;
  const share = limit === 0 ? '' : `, ${figure(Math.abs((100 * spare) / limit), 2)} %`;
  return `; at rest ${withUnit(value, unit)}${share === '' ? '' : `${share} ${spare >= 0 ? 'in hand' : 'BEYOND it'}`}`;
}

/** What a loop does about a deviation, and whether that helps. */
export function senseLine(l: Loop, q: LoopSense): string {
  const more = { ratio: `more ${moved(l)}`, flow: `more ${moved(l)}`, 'set point': 'a higher set point' };
  const less = { ratio: `less ${moved(l)}`, flow: `less ${moved(l)}`, 'set point': 'a lower set point' };
  const does = (l.controller.action === 'direct' ? more : less)[l.move.kind];
  const told = `    ${l.measure.of} high -> ${does}`;
  if (q.gain === null) return `${told}; how the plant answers is not known without a rest: try 'run'`;
  const unit = l.move.kind === 'ratio' ? 'ratio' : l.move.kind === 'flow' ? 'm^3/h' : 'g/L';
  const plant = `plant ${gainText(l, 1 / q.gain, true)} at rest`;
  if (q.right === null)
    return `${told}; plant 0 g/L per ${unit} at rest: NO EFFECT on ${l.measure.of}; measure or move something else`;
  const other = l.controller.action === 'direct' ? 'reverse' : 'direct';
  return `${told}; ${plant}: ${q.right ? 'the right way round' : `the WRONG WAY ROUND, write action: ${other}`}`;
}

/** The flow that moves, or the loop that is led: without its last word where that is plain. */
const moved = (l: Loop): string => l.move.quantity.replace(/\.flow$/, '');

/** What of the plant at rest deserves a look. */
export function restLooks(c: Checked): string[] {
  const { limits, loops = [] } = c.plant.scenario;
  const broken = limits.flatMap((l, i): string[] => {
    const v = c.limited[i];
    if (v === null || (l.side === 'below' ? v <= l.value : v >= l.value)) return [];
    return [
      `  ${l.stream}.${l.quantity}: the limit is broken at rest already; look at flows, stages and law, or at the limit`,
    ];
  });
  const bound = c.loops.flatMap((q, i): string[] =>
    q.binds === null
      ? []
      : [
          `  ${q.name}: at rest its output stands at its ${q.binds} limit, ${outputText(loops[i], q.output)}: widen low and high, or move the set point`,
        ],
  );
  const drifting = c.drifts
    .filter((d) => d.until < SOON)
    .map(
      (d) =>
        `  ${d.tank}: ${d.rate > 0 ? 'gains' : 'loses'} ${figure(Math.abs(d.rate) * 86400)} m^3/d and is ${d.rate > 0 ? 'full' : 'empty'} in ${clock(d.until)}: ${d.rate > 0 ? 'a larger flow out or a bleed' : 'make_up or a smaller flow out'} keeps its level`,
    );
  return [...broken, ...bound, ...drifting];
}
