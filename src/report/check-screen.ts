import type { Plant } from '../plant/assemble.ts';
import { idleTrains, streamFlows, thinMixers, trainFacts } from '../plant/facts.ts';
import { endWords, settingLines } from './circuit-words.ts';
import { commissioningLines } from './commissioning-lines.ts';
import { clock, columns, figure, withUnit } from './figures.ts';
import { loopLines } from './loop-words.ts';
import { rehearsingLines } from './rehearsing-lines.ts';
import { startWords } from './screen.ts';

/** `check`: the plant as understood. */
export function checkScreen(plant: Plant): string[] {
  const s = plant.scenario;
  const lines = [`OK  ${s.title}`, ...(s.trains.length > 0 ? [''] : [])];
  if (s.trains.length > 0) lines.push(...trainTable(plant), '', ...streamTable(plant));
  lines.push(...settingLines(plant));
  if (s.upsets.length > 0) lines.push('', 'Upsets');
  const upsets = s.upsets.map((u) => {
    const ramp = u.over > 0 ? ` over ${clock(u.over)}` : ' at once';
    return `  ${clock(u.at)}: ${u.words}${ramp}, ${u.lasts === null ? 'to the end of the run' : `for ${clock(u.lasts)}`}`;
  });
  // One change in words can move several quantities.
  lines.push(...new Set(upsets));
  if (s.loops && s.loops.length > 0) lines.push('', 'Loops', ...s.loops.flatMap(loopLines));
  const thin = thinMixers(plant).map(
    (q) =>
      `  ${q.stage}: the continuous phase, ${q.continuity}, is ${figure(100 * q.share)} % of the mixer: beyond the usual limits it may invert`,
  );
  const idle = idleTrains(plant).map(
    (name) => `  ${name}: no solute has an equilibrium here, so nothing transfers in this train`,
  );
  if (thin.length + idle.length > 0) lines.push('', 'Worth a look', ...idle, ...thin);
  if (s.limits.length > 0) lines.push('', 'Limits');
  for (const l of s.limits) {
    const output = plant.system.outputs.find((o) => o.path === `${l.stream}.${l.quantity}`);
    const from = l.from > 0 ? `, from ${clock(l.from)} on` : '';
    lines.push(`  ${l.stream}.${l.quantity} ${l.side} ${withUnit(l.value, output?.unit ?? '')}${from}`);
  }
  lines.push(...commissioningLines(s), ...rehearsingLines(s));
  lines.push(
    '',
    `${plant.system.places.length} states, ${s.horizon / s.recordEvery < 1e6 ? Math.floor(s.horizon / s.recordEvery) + 1 : '> 1e6'} records over ${clock(s.horizon)}, start ${startWords(s)}.`,
  );
  return lines;
}

function trainTable(plant: Plant): string[] {
  const span = (r: readonly [number, number], f: (v: number) => string): string =>
    f(r[0]) === f(r[1]) ? f(r[0]) : `${f(r[0])} to ${f(r[1])}`;
  return columns([
    [
      'train',
      'stages',
      'aqueous',
      'organic',
      'O/A',
      'mixer time',
      'settler load',
      'turnover aq',
      'turnover org',
    ],
    ...trainFacts(plant).map((f) => [
      f.train,
      String(f.stages),
      `${figure(f.aqueous * 3600)} m^3/h`,
      `${figure(f.organic * 3600)} m^3/h`,
      figure(f.ratio),
      span(f.mixerResidence, (v) => clock(v)),
      f.specificFlow === null ? '-' : `${span(f.specificFlow, (v) => figure(v * 3600))} m/h`,
      clock(f.held.aqueous / f.aqueous),
      clock(f.held.organic / f.organic),
    ]),
  ]);
}

/** Every stream, what makes and takes it, and its flow as feeds and pumps set it. */
function streamTable(plant: Plant): string[] {
  const s = plant.scenario;
  const flows = streamFlows(plant);
  return [
    'Streams',
    ...[...plant.network.streams.values()].map(
      (q) =>
        `  ${q.name} (${q.phase}, ${figure(3600 * (flows.get(q.name) ?? 0))} m^3/h): ${endWords(s, q.maker)} -> ${endWords(s, q.user)}`,
    ),
  ];
}
