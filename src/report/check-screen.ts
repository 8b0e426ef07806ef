import type { Plant } from '../plant/assemble.ts';
import { idleTrains, streamFlows, thinMixers, trainFacts } from '../plant/facts.ts';
import type { Change } from '../scenario/scenario.ts';
import type { Checked } from '../study/check/check.ts';
import { endWords, settingLines } from './circuit-words.ts';
import { commissioningLines } from './commissioning-lines.ts';
import { clock, columns, figure, withUnit } from './figures.ts';
import { loopLines } from './loop-words.ts';
import { rehearsingLines } from './rehearsing-lines.ts';
import { limitAtRest, restLooks, restTable, senseLine } from './rest-words.ts';
import { startWords } from './screen.ts';
import { suspicionLine } from './suspicion-words.ts';

/** `check`: the plant as understood, what it comes to, and what is unusual about it. */
export function checkScreen(checked: Checked): string[] {
  const { plant } = checked;
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
  const loops = s.loops ?? [];
  const sense = (i: number): string[] => (checked.loops[i] ? [senseLine(loops[i], checked.loops[i])] : []);
  if (loops.length > 0) lines.push('', 'Loops', ...loops.flatMap((l, i) => [...loopLines(l), ...sense(i)]));
  if (s.limits.length > 0) lines.push('', 'Limits');
  for (const [i, l] of s.limits.entries()) {
    const unit = plant.system.outputs.find((o) => o.path === `${l.stream}.${l.quantity}`)?.unit ?? '';
    const from = l.from > 0 ? `, from ${clock(l.from)} on` : '';
    lines.push(
      `  ${l.stream}.${l.quantity} ${l.side} ${withUnit(l.value, unit)}${from}${limitAtRest(l, checked.limited[i], unit)}`,
    );
  }
  lines.push(...commissioningLines(s), ...rehearsingLines(s), ...restTable(checked));
  const looks = worthALook(checked);
  if (looks.length > 0) lines.push('', 'Worth a look', ...looks);
  lines.push(
    '',
    `${plant.system.places.length} states, ${s.horizon / s.recordEvery < 1e6 ? Math.floor(s.horizon / s.recordEvery) + 1 : '> 1e6'} records over ${clock(s.horizon)}, start ${startWords(s)}.`,
  );
  return lines;
}

/** What is unusual, each with what to do about it. */
function worthALook(checked: Checked): string[] {
  const { plant } = checked;
  const { recordEvery, upsets } = plant.scenario;
  const thin = thinMixers(plant).map(
    (q) =>
      `  ${q.stage}: the continuous phase, ${q.continuity}, is ${figure(100 * q.share)} % of the mixer, usual 25 % or more: it may invert; state the other continuity, a recycle, or inversion: true to let it`,
  );
  const idle = idleTrains(plant).map(
    (name) =>
      `  ${name}: no solute has an equilibrium here, so nothing transfers in this train; give it one, such as equilibrium: {${plant.scenario.solutes[0]}: {law: ratio, ratio: 2}}`,
  );
  const shortest = Math.min(...upsets.map(lasting));
  const brief =
    shortest < recordEvery
      ? [
          `  record_every: ${clock(recordEvery)}, but an upset lasts ${clock(shortest)}: limits are watched all the same, series.csv may not show it; write record_every: ${clock(shortest / 5)}`,
        ]
      : [];
  return [...idle, ...thin, ...checked.suspicious.map(suspicionLine), ...restLooks(checked), ...brief];
}

/** s for which an upset is on; one that stays has no end. */
const lasting = (u: Change): number => (u.lasts === null ? Infinity : Math.max(u.lasts, u.over));

function trainTable(plant: Plant): string[] {
  const span = (r: readonly [number, number], f: (v: number) => string): string =>
    f(r[0]) === f(r[1]) ? f(r[0]) : `${f(r[0])} to ${f(r[1])}`;
  const facts = trainFacts(plant);
  const banded = facts.some((f) => f.band !== null);
  return columns([
    [
      'train',
      'stages',
      'aqueous',
      'organic',
      'O/A',
      'mixer time',
      'settler load',
      ...(banded ? ['band'] : []),
      'turnover aq',
      'turnover org',
    ],
    ...facts.map((f) => [
      f.train,
      String(f.stages),
      `${figure(f.aqueous * 3600)} m^3/h`,
      `${figure(f.organic * 3600)} m^3/h`,
      figure(f.ratio),
      span(f.mixerResidence, (v) => clock(v)),
      f.specificFlow === null ? '-' : `${span(f.specificFlow, (v) => figure(v * 3600))} m/h`,
      ...(banded ? [f.band === null ? '-' : `${span(f.band, (v) => figure(100 * v))} cm`] : []),
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
