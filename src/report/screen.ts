import type { Plant } from '../plant/assemble.ts';
import { explain } from '../solve/outcome.ts';
import type { LimitReport } from '../study/limit-watch.ts';
import type { RunResult, SteadyResult } from '../study/result.ts';
import type { TrainFigures } from '../study/train-figures.ts';
import { shortCaution } from './cautions.ts';
import { clock, columns, figure, shown, withUnit } from './figures.ts';
import { reportLines, restLines } from './loop-words.ts';

/** First lines of `run`: limits first, then what the outlets came to, then what may be trusted. */
export function runScreen(r: RunResult): string[] {
  const s = r.plant.scenario;
  const lines = [`RUN  ${s.title}: ${clock(r.stop.time)} from ${startWords(s)}`];
  if (!r.complete) lines.push(`INCOMPLETE  ${explain(r.stop)}`);
  for (const q of r.shades) lines.push(`upset  ${q.words}, ${clock(q.from)} to ${clock(q.to)}`);
  for (const c of r.clamped)
    lines.push(
      `note   ${c.quantity} would ${c.at > 0 ? 'exceed 100 %' : 'fall below 0'} after ${clock(c.time)}: held there; make the change smaller`,
    );
  for (const l of r.limits) lines.push(...limitLines(l));
  lines.push(...reportLines(s.loops ?? [], r.loops));
  if (r.events.length > 0) lines.push('Events:');
  // Start-up has many events; those at the end tell how the plant stands.
  const told = (e: { time: number; message: string }): string => `  ${clock(e.time)}  ${e.message}`;
  const between = r.events.length - 8;
  lines.push(...r.events.slice(0, between > 0 ? 4 : 8).map(told));
  if (between > 0) lines.push(`  … and ${between} between, in summary.json`, ...r.events.slice(-4).map(told));
  lines.push('', ...outletTable(r));
  const worst = r.closures.reduce((a, b) => (b.closure > a.closure ? b : a));
  lines.push(
    '',
    `Balances close to ${worst.closure.toExponential(1)} (${worst.name}). ${r.integrator}, ${r.work.steps} steps, ${rejected(r)} rejected, tolerance ${r.tolerance}.`,
    shortCaution,
  );
  return lines;
}

/** The start of a run in words. */
export const startWords = ({ start, trains }: Plant['scenario']): string =>
  typeof start === 'object'
    ? `the state kept in ${start.file}`
    : start === 'steady'
      ? 'steady state'
      : trains.length === 0
        ? 'filled vessels'
        : start;

const rejected = ({ work: w }: RunResult): number =>
  w.rejectedByError + w.rejectedByNegative + w.rejectedByNonFinite + w.rejectedBySingular;

/** One limit in words. */
export function limitLines(l: LimitReport): string[] {
  const from = l.limit.from > 0 ? ` from ${clock(l.limit.from)} on` : '';
  const name = `${l.path} ${l.limit.side === 'below' ? '<' : '>'} ${withUnit(l.limit.value, l.unit)}${from}`;
  if (Number.isNaN(l.worst.value))
    return [
      `NOT JUDGED ${name}: there was never enough to compare, or the time was not reached; lengthen the horizon, or let it count earlier`,
    ];
  const negligible = Math.abs(l.worst.value) < 1e-6 * Math.abs(l.limit.value);
  const worst = `worst ${withUnit(negligible ? 0 : l.worst.value, l.unit)} at ${clock(l.worst.time)}`;
  if (l.spells.length === 0) return [`KEPT   ${name}: ${worst}`];
  const spells = l.spells.map((q) =>
    q.to === null ? `${clock(q.from)} to the end` : `${clock(q.from)} to ${clock(q.to)}`,
  );
  const list =
    spells.length > 3 ? `${spells.slice(0, 3).join(', ')} and ${spells.length - 3} more` : spells.join(', ');
  const beyond = l.beyond === null ? '' : `, ${figure(l.beyond)} kg above the limit`;
  return [`BROKEN ${name}: ${list}; ${worst}`, `       outside for ${clock(l.outside)} in all${beyond}`];
}

/** Rows of the table of outlets; the rest stands in the files. */
const MOST_ROWS = 16;

/** Outlets, tanks and batches: at the start, before the first upset if there is one, and at the end. */
function outletTable(r: RunResult): string[] {
  const { plant, snapshots } = r;
  const { outputs } = plant.system;
  const s = plant.scenario;
  const limited = s.limits.map((l) => l.stream).filter((n) => plant.network.streams.get(n)?.user);
  const names = [
    ...new Set(limited),
    ...plant.network.outlets.map((o) => o.name),
    ...s.tanks.map((t) => t.name),
    ...s.batches.flatMap((b) => [`${b.name} aqueous`, `${b.name} organic`]),
  ];
  const end = snapshots[snapshots.length - 1].outputs;
  const rows = names.flatMap((n) =>
    outputs.flatMap((o, i) =>
      o.path.startsWith(`${n}.`) && !o.path.endsWith('.flow') && tellsMost(o.path, end[i]) ? [i] : [],
    ),
  );
  const more = rows.length - MOST_ROWS;
  return [
    ...columns([
      ['', ...snapshots.map((q) => (q.label === 'worst' ? 'at the worst' : q.label)), 'unit'],
      ['', ...snapshots.map((q) => (q.time === 0 ? '0 h' : clock(q.time))), ''],
      ...rows.slice(0, MOST_ROWS).map((i) => {
        const { unit, factor } = shown(outputs[i].unit);
        return [
          outputs[i].path,
          ...snapshots.map((q) => figure(nil(q.outputs[i], outputs[i].scale) * factor, 4)),
          unit,
        ];
      }),
    ]),
    ...(more > 0 ? [`  … and ${more} more in summary.json`] : []),
  ];
}

/** A value that is nothing but rounding counts as zero. */
const nil = (value: number, scale: number): number => (Math.abs(value) < 1e-12 * scale ? 0 : value);

/** Of the purities of a stream one says it all. */
const tellsMost = (path: string, value: number): boolean => !path.includes('.purity of ') || value > 50;

export function steadyScreen(r: SteadyResult): string[] {
  const { plant } = r;
  const s = plant.scenario;
  const { outputs } = plant.system;
  const read = (path: string): string => {
    const i = outputs.findIndex((o) => o.path === path);
    return i < 0 ? '-' : figure(r.outputs[i] * shown(outputs[i].unit).factor, 4);
  };
  const lines = [`STEADY STATE  ${s.title}`];
  lines.push(...restLines(s.loops ?? [], r.loops));
  for (const f of r.figures) lines.push(...figureLines(f));
  for (const q of r.usedUp.slice(0, 4))
    lines.push(
      `WARNING  ${q.species} in ${q.stage}.mixer is used up: more base is dosed or stripped than it can carry, and these figures are not to be trusted; dose less, or bring more of it`,
    );
  for (const d of r.drifts)
    lines.push(
      `${d.tank} ${d.rate > 0 ? 'gains' : 'loses'} ${figure(Math.abs(d.rate) * 86400)} m^3/d: ${d.rate > 0 ? 'full' : 'empty'} in ${clock(d.until)}`,
    );
  const dissolved = [...s.solutes, ...s.species];
  if (s.batches.length > 0)
    lines.push(
      '',
      'Batches at equilibrium [g/L]',
      ...columns([
        ['', ...dissolved],
        ...s.batches.flatMap((b) =>
          (['aqueous', 'organic'] as const).map((phase) => [
            `${b.name} ${phase}`,
            ...dissolved.map((c) => read(`${b.name} ${phase}.${c}`)),
          ]),
        ),
      ]),
    );
  if (s.trains.length > 0) lines.push('', 'Streams [m^3/h, g/L]');
  const streams = [...plant.network.streams.values()];
  if (s.trains.length > 0)
    lines.push(
      ...columns([
        ['', 'flow', ...dissolved, ...(s.solutes.length > 1 ? ['purity'] : [])],
        ...streams.map((q) => [
          q.name,
          read(`${q.name}.flow`),
          ...dissolved.map((c) => read(`${q.name}.${c}`)),
          ...(s.solutes.length > 1 ? [purest(r, q.name)] : []),
        ]),
      ]),
    );
  for (const t of s.trains) {
    if (t.stages.length > 12) {
      lines.push('', `Stages of ${t.name}: ${t.stages.length}, in summary.json`);
      continue;
    }
    lines.push('', `Stages of ${t.name}, leaving each stage [g/L]`);
    lines.push(
      ...columns([
        ['', ...dissolved.map((c) => `aqueous ${c}`), ...s.solutes.map((c) => `organic ${c}`)],
        ...t.stages.map((_, j) => [
          `stage ${j + 1}`,
          ...dissolved.map((c) => read(`${t.name}.${j + 1}.settler.aqueous.${c}`)),
          ...s.solutes.map((c) => read(`${t.name}.${j + 1}.settler.organic.${c}`)),
        ]),
      ]),
    );
  }
  lines.push(
    '',
    `Boundary closes to ${r.imbalance.toExponential(1)}; ${r.iterations} iterations.`,
    shortCaution,
  );
  return lines;
}

/** The solute of which a stream holds most, and its share in all of them. */
function purest({ plant, outputs }: SteadyResult, stream: string): string {
  const list = plant.scenario.solutes.map((solute) => ({
    solute,
    share: outputs[plant.system.outputs.findIndex((o) => o.path === `${stream}.purity of ${solute}`)],
  }));
  const most = list.reduce((a, b) => (b.share > a.share ? b : a));
  return most.share > 0 ? `${figure(most.share, 4)} % ${most.solute}` : '-';
}

/** What people look for in a train, in two or three lines. */
function figureLines(f: TrainFigures): string[] {
  const lines = f.solutes.map((q) => {
    const what =
      q.transferred >= 0
        ? 'of what the aqueous brings is extracted'
        : 'of what the organic brings is stripped';
    const load = q.load === null ? '' : `, organic loaded to ${figure(100 * q.load)} % of its maximum`;
    const rate = `${figure(Math.abs(q.transferred) * 3600)} kg/h`;
    return `${f.train}: ${figure(q.recovery * 100, 4)} % ${what} (${q.solute}, ${rate}, net ${figure(q.netTransfer)} g/L${load})`;
  });
  const span = (list: readonly (number | null)[], digits = 3): string => {
    const known = list.filter((v): v is number => v !== null);
    if (known.length === 0) return '-';
    const [a, b] = [figure(Math.min(...known), digits), figure(Math.max(...known), digits)];
    return a === b ? a : `${a} to ${b}`;
  };
  const time = (v: number | null): string => (v === null ? '-' : clock(v));
  const efficiency = f.solutes.map((q) => {
    const own = span(q.efficiency.map((e) => (e === null ? null : 100 * e)));
    return f.solutes.length > 1 ? `${own} % (${q.solute})` : `${own} %`;
  });
  const side = f.side === null ? 'on the side of each mixer' : `${f.side} side`;
  const loads = f.stages.map((q) => (q.settlerLoad === null ? null : q.settlerLoad * 3600));
  const parts = [
    `O/A ${figure(f.advance)} through, ${span(f.stages.map((q) => q.mixerRatio))} in the mixers`,
    ...(efficiency.length > 0 ? [`stage efficiency ${efficiency.join(', ')}, ${side}`] : []),
    ...(loads.some((v) => v !== null) ? [`settlers ${span(loads)} m³/h·m²`] : []),
    `held ${time(f.held.aqueous)} aqueous, ${time(f.held.organic)} organic`,
    ...(f.solventLost > 0
      ? [
          `solvent lost ${figure(f.solventLost * 86400)} m³/d (${figure(f.specificLoss * 1e6)} mL/m³ of aqueous)`,
        ]
      : []),
  ];
  return [...lines, `  ${parts.join('; ')}`, ...separationLine(f, span)];
}

function separationLine(
  { separation: q }: TrainFigures,
  span: (list: readonly (number | null)[]) => string,
): string[] {
  if (q === null) return [];
  const load = q.load === null ? [] : [`all solutes load ${figure(100 * q.load)} % of the organic's maximum`];
  const known = q.factors.filter((x) => x.stages.some((v) => v !== null));
  const factors = known.map((x) => `separation factor ${x.one} over ${x.other} ${span(x.stages)}`);
  const crowded = q.crowding
    .filter((x) => x.share !== null && x.share < 0.99)
    .map((x) => `${x.solute} crowded to ${figure(100 * (x.share as number))} % of its loading alone`);
  const words = [...factors, ...load, ...crowded];
  return words.length > 0 ? [`  ${words.join('; ')}`] : [];
}
