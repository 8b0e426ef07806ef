import type { CommissionResult } from '../study/commission/commission.ts';
import type { Ensemble, Spread } from '../study/commission/ensemble.ts';
import type { ComesGood, OnSpec } from '../study/commission/good.ts';
import type { StartResult } from '../study/commission/procedures.ts';
import type { SlowMode } from '../study/commission/where.ts';
import { shortCaution } from './cautions.ts';
import { clock, columns, figure, shown, withUnit } from './figures.ts';
import { restLines } from './loop-words.ts';
import { startWords } from './screen.ts';

const MOST_ROWS = 6;
const MOST_STARTS = 6;
/** A tail that falls more slowly than the slowest mode by this factor is none of a single mode. */
const FRONT = 1.15;
const percent = (share: number, digits = 2): string => `${figure(100 * share, digits)} %`;
const when = (t: number | null): string => (t === null ? '-' : clock(t));

/** First lines of `commission`: when it comes good and why not sooner, then what follows from that. */
export function commissionScreen(r: CommissionResult): string[] {
  const s = r.plant.scenario;
  const flows = [
    ...s.feeds,
    ...s.tanks.flatMap((t) => (t.flow === null ? [] : [{ name: t.name, flow: t.flow }])),
  ];
  const told = flows.slice(0, 3).map((f) => `${withUnit(f.flow, 'm^3/s')} ${f.name}`);
  return [
    `START-UP  ${s.title}: from ${[startWords(s), ...(told.length > 0 ? [told.join(', ')] : [])].join('; ')}`,
    ...answerLines(r),
    '',
    ...table(r),
    ...(r.quantities.some((q) => q.overshoot) ? overshoots(r) : []),
    ...waitingLines(r),
    ...sampleLines(r),
    ...startLines(r),
    ...(r.ensemble ? ensembleLines(r.ensemble) : notAsked(r)),
    ...comparisonLines(r),
    '',
    shortCaution,
  ];
}

/** The answer in words: also what stands at the head of the pictures. */
export function answerLines(r: CommissionResult): string[] {
  const { followed } = r;
  const { rest } = followed;
  const lines: string[] = [];
  if (followed.stop.reason !== 'reached-end')
    lines.push(`INCOMPLETE  the run ended at ${clock(followed.ran)}`);
  if (!('state' in rest)) lines.push(`NO STEADY STATE  ${rest.reason}`);
  else if (!followed.settled) lines.push(`DOES NOT SETTLE  ${unsettled(r)}`);
  else if (r.steady === 0)
    lines.push(`At rest from the start: no ${whatIsJudged(r)} moves by more than 1 % of anything.`);
  else
    lines.push(
      `At rest at ${when(r.steady)}: from then on every ${whatIsJudged(r)} stays within 1 % of its change (of its final value: from ${when(r.nearFinal)}).${r.extended ? ` The horizon of ${clock(followed.asked)} was too short for all of the plant; it was run to ${clock(followed.ran)}.` : ''}`,
    );
  lines.push(...r.limits.map(limitLine));
  if ('state' in rest)
    for (const d of rest.drifts)
      lines.push(
        `${d.tank} has no steady level: it ${d.rate > 0 ? 'gains' : 'loses'} ${figure(Math.abs(d.rate) * 86400)} m^3/d and is ${d.rate > 0 ? 'full' : 'empty'} at ${clock(d.until)}`,
      );
  const [slow] = r.modes;
  if (slow) {
    const front = r.tail !== null && slow.time > 0 && r.tail.seen > FRONT * slow.time;
    const looped = 'state' in rest && rest.loops.some((q) => q.automatic);
    const seen = r.tail
      ? ` Seen in the tail of ${r.tail.path}: ${clock(r.tail.seen)}${front ? (looped ? ', set by the loop: more than the plant with its loops held takes' : ', more than any one mode takes: a front still travels along the stages') : ''}.`
      : '';
    lines.push(`Slowest mode ${modeWords(slow)}.${seen}`);
  }
  const others = r.modes.slice(1, 3).filter((m) => m.time > 0 && slow && m.time > slow.time / 3);
  const next = [...new Set(others.map(modeWords))];
  if (next.length > 0) lines.push(`Next: ${next.join('; ')}.`);
  if (r.begun.length > 0) lines.push(`Begins with the start: ${r.begun.join('; ')}.`);
  lines.push(...loopLines(r));
  if (r.leftOut.length > 0)
    lines.push(
      `Left out, because it comes later: ${r.leftOut.slice(0, 3).join('; ')}${r.leftOut.length > 3 ? ' …' : ''}.`,
    );
  const { events } = followed;
  if (events.length > 0) {
    const first = events.slice(0, 2).map((e) => `${clock(e.time)} ${e.message}`);
    lines.push(
      `${events.length} event${events.length > 1 ? 's' : ''}: ${first.join('; ')}${events.length > 2 ? '; … in summary.json' : ''}`,
    );
  }
  return lines;
}

/** How the loops stand at rest, and how they were followed. */
function loopLines({ plant, followed: { rest } }: CommissionResult): string[] {
  const loops = plant.scenario.loops ?? [];
  if (loops.length === 0) return [];
  const at = 'state' in rest ? rest.loops : [];
  if (at.length === 0) return [`In manual: ${loops.map((l) => l.name).join(', ')}.`];
  return [
    ...restLines(loops, at).map((l) => `At rest ${l}`),
    'Loops are followed with analysers that read without noise; the slowest modes are those of the plant with its loops held.',
  ];
}

const whatIsJudged = (r: CommissionResult): string =>
  r.quantities.some((q) => q.quantity.kind === 'outlet') ? 'outlet' : 'vessel';

function unsettled(r: CommissionResult): string {
  const { events, ran, rest } = r.followed;
  const late = events.filter((e) => e.time > ran / 2);
  if (late.length > 1)
    return `${late.length} events in the second half of ${clock(ran)}, the last: ${late[late.length - 1].message}`;
  const grows = 'state' in rest ? rest.modes.find((m) => m.rate > 0) : undefined;
  if (grows) return 'there is a steady state, but a small disturbance of it grows';
  return `not within 1 % for good after ${clock(ran)}`;
}

function limitLine(l: OnSpec): string {
  const name = `${l.path} ${l.limit.side === 'below' ? '<' : '>'} ${withUnit(l.limit.value, l.unit)}`;
  const final = l.final === null ? '' : ` (at rest ${withUnit(l.final, l.unit)})`;
  if (l.from === null) return `NEVER ON-SPEC  ${name}${final}`;
  if (l.neverOutside && l.from === 0) return `On-spec throughout: ${name}${final}.`;
  if (l.neverOutside)
    return `On-spec from ${clock(l.from)}: ${name}${final}; never outside, but a barren outlet proves nothing: counted from the first aqueous turnover.`;
  return `On-spec from ${clock(l.from)}: ${name}${final}.`;
}

function modeWords(m: SlowMode): string {
  const some: SlowMode['lives'][number][] = [];
  let sum = 0;
  for (const q of m.lives) {
    if (sum >= 0.75 || some.length === 3) break;
    some.push(q);
    sum += q.share;
  }
  const places = some.map((q) => `${q.where} ${Math.round(100 * q.share)} %`).join(', ');
  const swing = m.period === null ? '' : `, swings once in ${clock(m.period)}`;
  return m.time > 0
    ? `${clock(m.time)}${swing} (${m.of}): ${places}`
    : `GROWS by e in ${clock(-m.time)}${swing} (${m.of}): ${places}`;
}

/** What comes good when, in that order; stages together by train. */
function table(r: CommissionResult): string[] {
  const all = r.quantities.filter((q) => q.quantity.kind !== 'stage');
  // What does not move says nothing, unless nothing moves.
  const single = all.some((q) => q.change !== null) ? all.filter((q) => q.change !== null) : all;
  const order = (q: ComesGood): number => q.ofChange[3] ?? q.ofFinal[3] ?? Number.MAX_VALUE;
  // Outlets and tanks before the streams between, the last ones before the first.
  const inner = (q: ComesGood): number => (q.quantity.kind === 'stream' ? 1 : 0);
  const chosen = [...single].sort((a, b) => inner(a) - inner(b) || order(b) - order(a)).slice(0, MOST_ROWS);
  const sorted = chosen.sort((a, b) => order(a) - order(b));
  const rows = sorted.map((q) => {
    const { unit, factor } = shown('kg/m^3');
    const last = q.ofChange[3] ?? q.ofFinal[3];
    return [
      q.quantity.path,
      `${figure(q.start * factor)} -> ${q.final === null ? '-' : `${figure(q.final * factor)} ${unit}`}`,
      ...[0, 1, 2, 3].map((i) => when(q.ofChange[i])),
      when(q.ofFinal[3]),
      last === null || q.turnover === null ? '-' : figure(last / q.turnover, 2),
    ];
  });
  const trains = r.plant.scenario.trains.map((t) => {
    const own = r.quantities.filter((q) => q.quantity.kind === 'stage' && q.quantity.train === t.name);
    const latest = (pick: (q: ComesGood) => number | null): string => {
      const times = own.flatMap((q) => pick(q) ?? []);
      return times.length === 0 ? '-' : clock(Math.max(...times));
    };
    const slowest = own.reduce<ComesGood | null>(
      (a, b) => (a && (a.ofChange[3] ?? 0) >= (b.ofChange[3] ?? 0) ? a : b),
      null,
    );
    return [
      t.stages.length === 1 ? `stage of ${t.name}` : `all stages of ${t.name}`,
      t.stages.length === 1 || !slowest?.ofChange[3]
        ? ''
        : `stage ${slowest.quantity.of.slice(t.name.length + 1)} last`,
      ...[0, 1, 2, 3].map((i) => latest((q) => q.ofChange[i])),
      latest((q) => q.ofFinal[3]),
      '',
    ];
  });
  const more = single.length - rows.length;
  return [
    ...columns([
      [
        more > 0 ? `comes good (${rows.length} of ${single.length})` : 'comes good',
        'from -> to',
        '10 %',
        '5 %',
        '2 %',
        '1 % of change',
        '1 % of final',
        'turnovers',
      ],
      ...rows,
      ...trains,
    ]),
  ];
}

function overshoots(r: CommissionResult): string[] {
  const seen = r.quantities
    .filter((q) => q.quantity.kind !== 'stage' && q.overshoot && q.overshoot.share > 0.02)
    .sort((a, b) => (b.overshoot?.share ?? 0) - (a.overshoot?.share ?? 0));
  if (seen.length === 0) return [];
  const told = seen
    .slice(0, 3)
    .map(
      (q) =>
        `${q.quantity.path} by ${percent(q.overshoot?.share ?? 0)} of its change at ${clock(q.overshoot?.time ?? 0)}`,
    );
  return [`Overshoots: ${told.join('; ')}.`];
}

function waitingLines(r: CommissionResult): string[] {
  const { waiting } = r.plain;
  const { solutes } = r.plant.scenario;
  const outlets = waiting.outlets.map((o) => {
    const held = o.solutes.map((kg, k) => `${figure(kg)} kg ${solutes[k]}`);
    const until =
      o.until === null
        ? 'never good'
        : `until ${clock(o.until)}${o.by === 'change' ? ' (5 % of change)' : ''}`;
    return `off-spec ${o.outlet}: ${figure(o.volume)} m^3 with ${held.join(', ')}, ${until}`;
  });
  const solvent = [
    ...(waiting.solventFed > 0 ? [`${figure(waiting.solventFed)} m^3 fresh solvent`] : []),
    ...(waiting.solventLost > 0 ? [`${figure(waiting.solventLost)} m^3 solvent carried away`] : []),
    ...(waiting.energy !== null ? [`${figure(waiting.energy / 3.6e6)} kWh`] : []),
  ];
  const sum = waiting.costs.reduce((q, c) => q + c.amount, 0);
  const money = waiting.costs.map((c) => `${c.of} ${figure(c.amount)}`).join(', ');
  const told = [
    ...(waiting.costs.length > 0 ? [`${figure(sum)} ${waiting.currency} (${money})`] : []),
    ...solvent,
  ];
  if (outlets.length === 0 && told.length === 0) return [];
  return [
    `Cost of waiting, ${clock(waiting.until)} in all${told.length > 0 ? `: ${told.join(', ')}` : ''}`,
    ...outlets.slice(0, 4).map((o) => `  ${o}`),
  ];
}

function sampleLines(r: CommissionResult): string[] {
  const p = r.samples;
  if (p === null) return [];
  const trusted = p.trusted.slice(0, 4).map((q) => `${q.path} ${when(q.from)}`);
  const pairs = p.pairs.map((q) =>
    q.equalFrom === null
      ? `${clock(q.gap)} apart: not equal within the run`
      : `${clock(q.gap)} apart, equal at ${clock(q.equalFrom)}: still ${percent(q.left ?? 0)} off (by the slowest mode alone ${percent(q.allowed)})`,
  );
  return [
    `Samples mean steady state (drift below ${percent(p.repeatability)}) from: ${trusted.join(', ')}.`,
    `  Two equal samples of ${p.last} ${pairs.join('; ')}.`,
    `  Take ${p.points.slice(0, 3).join(', ')} at ${p.times.map(clock).join(', ')}; the last two confirm.`,
  ];
}

function startLines(r: CommissionResult): string[] {
  if (r.starts.length < 2) return [];
  const [best] = r.starts;
  const gain = sooner(best, r.plain);
  const helping = r.starts.filter((q) => q !== r.plain && sooner(q, r.plain) > 0).length;
  const answer =
    best === r.plain || gain <= 0
      ? 'No procedure is faster than the plain start.'
      : Number.isFinite(gain)
        ? `Fastest start: ${best.name}, ${clock(gain)} sooner than the plain one (${helping} of ${r.starts.length - 1} help).`
        : `Fastest start: ${best.name}; the plain one does not get there.`;
  const limited = r.limits.length > 0;
  const fed = r.starts.some((q) => q.waiting.solventFed > 0);
  const lost = r.starts.some((q) => q.waiting.solventLost > 0);
  const rows = r.starts
    .slice(0, MOST_STARTS)
    .map((q, i) => [
      `${i + 1}  ${q.name}`,
      ...(limited ? [when(q.onSpec)] : []),
      when(q.steady),
      `${figure(q.waiting.outlets.reduce((v, o) => v + o.volume, 0))} m^3`,
      ...(fed ? [`${figure(q.waiting.solventFed)} m^3`] : []),
      ...(lost ? [`${figure(q.waiting.solventLost)} m^3`] : []),
      q.endsElsewhere.length > 0
        ? `leaves ${q.endsElsewhere[0].path} at ${withUnit(q.endsElsewhere[0].final, 'kg/m^3')}`
        : '',
    ]);
  const heads = [
    'rank',
    ...(limited ? ['on-spec'] : []),
    'at rest (1 %)',
    'off-spec',
    ...(fed ? ['solvent fed'] : []),
    ...(lost ? ['solvent lost'] : []),
    '',
  ];
  return [answer, ...columns([heads, ...rows])];
}

/** s by which one start is sooner than another: on-spec where that differs by a minute, else at rest. */
function sooner(a: StartResult, b: StartResult): number {
  const gain = (x: number | null, y: number | null): number =>
    x === y ? 0 : (y ?? Number.POSITIVE_INFINITY) - (x ?? Number.POSITIVE_INFINITY);
  const onSpec = gain(a.onSpec, b.onSpec);
  return Math.abs(onSpec) >= 60 ? onSpec : gain(a.steady, b.steady);
}

/** Why there is no ensemble although inputs are uncertain. */
const notAsked = (r: CommissionResult): string[] =>
  r.plant.scenario.commissioning?.uncertain.length && !r.followed.settled
    ? ['How sure: not asked, because the start-up as stated comes to no rest.']
    : [];

function ensembleLines(e: Ensemble): string[] {
  const spread = (q: Spread): string => `P10 ${when(q.p10)}, P50 ${when(q.p50)}, P90 ${when(q.p90)}`;
  const odd = [
    ...(e.unsettled > 0 ? [`${e.unsettled} do not settle`] : []),
    ...(e.offSpec > 0 ? [`${e.offSpec} never keep the limits`] : []),
    ...(e.failed > 0 ? [`${e.failed} cannot be started (${e.reason})`] : []),
  ];
  const most = e.influence
    .slice(0, 3)
    .map((q) => `${q.path} ${q.correlation >= 0 ? '+' : ''}${q.correlation.toFixed(2)}`);
  return [
    `How sure: ${odd.length > 0 ? `of ${e.runs} runs ${odd.join(', ')}; ` : ''}at rest ${spread(e.steady)}${e.onSpec ? `; on-spec P90 ${when(e.onSpec.p90)}` : ''} (${e.runs} runs, seed ${e.seed}).`,
    `  What matters (rank correlation with the time): ${most.join(', ')}.`,
  ];
}

function comparisonLines(r: CommissionResult): string[] {
  if (r.comparison === null) return [];
  const told = r.comparison.columns.map((c) => {
    const { unit, factor } = shown(c.unit);
    const sign = c.bias >= 0 ? '+' : '';
    return `${c.path} ${sign}${figure(c.bias * factor)} / ${figure(c.rmse * factor)} ${unit} (${c.times.length} samples)`;
  });
  return [`Model less plant by ${r.comparison.file}, bias / RMSE: ${told.join('; ')}.`];
}
