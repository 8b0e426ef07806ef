import type { Loop } from '../scenario/loops.ts';
import type { Candidate } from '../study/tune/candidates.ts';
import type { MapPoint } from '../study/tune/map.ts';
import type { Proof } from '../study/tune/prove.ts';
import type { Tested } from '../study/tune/step-test.ts';
import type { Tuned, TuneResult } from '../study/tune/tune.ts';
import { shortCaution } from './cautions.ts';
import { clock, columns, figure, withUnit } from './figures.ts';
import { gainText, minutes, outputText } from './loop-words.ts';

/** First lines of `tune`: the settings to use, what the plant is like, what they stand for, and what they do. */
export function tuneScreen(r: TuneResult): string[] {
  const { loop } = r.joined.loops[r.loop];
  if (r.kind === 'unreachable')
    return unreachable(loop, r.atRest.binds as string, r.atRest.measurement, r.atRest.output);
  const lines = [headLine(r, loop), useLine(r, loop), plantLine(r, loop), ...warnings(r, loop)];
  const through = r.shades.map((q) => `${q.words}, ${clock(q.from)} to ${clock(q.to)}`);
  lines.push(
    '',
    `Through ${through.length > 0 ? through.join('; ') : 'noise alone'}:`,
    ...table(r, loop),
    '',
  );
  lines.push(...references(r, loop), ...answer(r, loop), ...schedule(r, loop), ...tests(r, loop));
  lines.push(shortCaution);
  return lines;
}

function unreachable(loop: Loop, binds: string, measurement: number, output: number): string[] {
  return [
    `LOOP  ${loop.name}  the set point cannot be reached: the ${binds} limit of the output binds`,
    `At output ${outputText(loop, output)} ${loop.measure.of} comes to rest at ${withUnit(measurement, 'kg/m^3')}, not at ${withUnit(loop.keepAt, 'kg/m^3')}.`,
    `Move the ${binds} limit, or keep it at ${withUnit(measurement, 'kg/m^3')}; nothing was tuned.`,
    shortCaution,
  ];
}

function headLine(r: Tuned, loop: Loop): string {
  const { move } = loop;
  const target =
    move.kind === 'ratio'
      ? `${move.quantity} / ${move.over}`
      : move.kind === 'flow'
        ? move.quantity
        : `set point of ${move.quantity}`;
  return `LOOP  ${loop.name}  ${loop.measure.of} -> ${target}, keep at ${withUnit(loop.keepAt, 'kg/m^3')}; output at rest ${outputText(loop, r.atRest.output)} (${outputText(loop, move.low)} to ${outputText(loop, move.high)})`;
}

function useLine(r: Tuned, loop: Loop): string {
  const { settings, name } = r.best.candidate;
  const band =
    r.forms.proportionalBand === null ? '' : `, proportional band ${figure(r.forms.proportionalBand)} %`;
  const runs = loop.controller.scan === null ? 'on each result' : `every ${clock(loop.controller.scan)}`;
  const what =
    settings.derivativeTime > 0 ? `PID, derivative time ${minutes(settings.derivativeTime)},` : 'PI';
  return `Use gain ${gainText(loop, settings.gain)}, integral time ${minutes(settings.integralTime)}, ${loop.controller.action}, ${what} ${runs} (${name})${band}.`;
}

function plantLine(r: Tuned, loop: Loop): string {
  const { every, delay } = loop.measure.analyser;
  const gain = r.point.restGain ?? r.point.hourGain;
  return `Plant here: ${gainText(loop, 1 / gain, true)}, lag ${minutes(r.point.fit.lag)}, delay ${minutes(r.point.fit.delay)} (FOPDT fitted to ${figure(100 * r.point.fit.error, 2)} %); the analyser adds ${minutes(delay)} + half of ${minutes(every)}: ${minutes(r.model.delay)} in all.`;
}

/** What must not be overlooked. */
function warnings(r: Tuned, loop: Loop): string[] {
  const lines: string[] = [];
  const { alongOutput: along, signChanges, unsafe, points } = r.map;
  const at = (p: MapPoint): string =>
    `output ${outputText(loop, p.output)}${p.throughput === 1 ? '' : `, throughput ${figure(100 * p.throughput)} %`}${p.grade === 1 ? '' : `, grade ${figure(100 * p.grade)} %`}`;
  if (signChanges.length > 0)
    lines.push(
      `WARNING the gain CHANGES SIGN: at ${at(signChanges[0])} the loop drives the plant the wrong way; keep low and high of its output on one side of that.`,
    );
  if (along) {
    const ratio = Math.abs((along.most.gain as number) / (along.least.gain as number));
    if (ratio > 2)
      lines.push(
        `WARNING gain falls from ${gainText(loop, 1 / Math.abs(along.most.gain as number), true)} (output ${outputText(loop, along.most.output)}) to ${gainText(loop, 1 / Math.abs(along.least.gain as number), true)} (output ${outputText(loop, along.least.output)}), ${figure(ratio, 2)} to 1; see the schedule.`,
      );
  }
  const unstable = unsafe.filter((p) => p.margins && !p.margins.stable);
  if (unsafe.length > 0)
    lines.push(
      `WARNING with these settings ${unsafe.length} of ${points.length} points of the map are ${unstable.length === unsafe.length ? 'unstable' : unstable.length > 0 ? `beyond Ms 2, ${unstable.length} of them unstable` : 'beyond Ms 2'}: first ${at(unstable[0] ?? unsafe[0])}; one set does not serve all, see the schedule.`,
    );
  const bound = r.best;
  if (bound.atLimit > 0.05 || bound.slewing > 0.05)
    lines.push(
      `NOTE    margins assume neither limit nor slew; here the output is at a limit ${figure(100 * bound.atLimit, 2)} % of the time, on its slew ${figure(100 * bound.slewing, 2)} %; widen them if the plant allows it.`,
    );
  return lines;
}

/** A verdict on margins in a word. */
export const verdict = (c: Candidate): string => {
  const { stable, sensitivity } = c.margins;
  if (!stable) return 'UNSTABLE';
  if (sensitivity > 2) return 'too lively';
  if (sensitivity > 1.65) return 'lively';
  return sensitivity < 1.2 ? 'slow' : 'sound';
};

function table(r: Tuned, loop: Loop): string[] {
  const unit = { ratio: 'per g/L', flow: 'm^3/h per g/L', 'set point': 'g/L per g/L' }[loop.move.kind];
  const factor = loop.move.kind === 'flow' ? 3600 : 1;
  const row = (p: Proof): string[] => {
    const c = p.candidate;
    const none = c === null ? '-' : null;
    return [
      p === r.best || p.name === r.best.name ? `> ${p.name}` : `  ${p.name}`,
      none ?? figure((c as Candidate).settings.gain * factor),
      none ?? figure((c as Candidate).settings.integralTime / 60, 2),
      none ?? figure((c as Candidate).margins.gain, 2),
      none ?? figure((c as Candidate).margins.phase, 2),
      none ?? figure((c as Candidate).margins.sensitivity, 3),
      none ?? figure((c as Candidate).margins.delay / 60, 2),
      figure(p.worst),
      p.outside > 0 ? clock(p.outside) : 'none',
      figure(p.beyond, 2),
      figure(p.iae / 3600, 3),
      p.step === null ? '-' : `${figure(100 * p.step.overshoot, 2)} %`,
      p.step === null ? '-' : p.step.settling === null ? 'not' : clock(p.step.settling),
      figure(p.travel * (loop.move.kind === 'flow' ? 3600 : 1), 2),
      figure(p.solvent, 2),
      c === null ? 'base line' : verdict(c),
    ];
  };
  return columns([
    [
      '',
      'gain',
      'int.',
      'GM',
      'PM',
      'Ms',
      'spare',
      'worst',
      'over',
      'above',
      'IAE',
      'over-',
      'settles',
      'travel',
      'solvent',
      '',
    ],
    ['', unit, 'min', '', 'deg', '', 'min', 'g/L', '', 'kg', 'g/L·h', 'shoot', '', '', 'm^3', ''],
    ...r.proofs.map(row),
  ]);
}

function references(r: Tuned, loop: Loop): string[] {
  const list = r.candidates.filter((c) => c.reference);
  if (list.length === 0) return [];
  const told = list.map(
    (c) =>
      `${c.name} ${gainText(loop, c.settings.gain)}, ${minutes(c.settings.integralTime)}: Ms ${c.margins.stable ? figure(c.margins.sensitivity) : 'none, UNSTABLE'}`,
  );
  return [`For reference only: ${told.join('; ')}.`];
}

/** What feedback alone does about the limit, and what else helps. */
function answer(r: Tuned, loop: Loop): string[] {
  const { backOff: b, best, ahead } = r;
  const lines: string[] = [];
  const helps = ahead.map(
    (a) =>
      `feedforward from ${a.from}, ${a.from.endsWith('.flow') ? flowGain(loop, a.gain) : gainText(loop, a.gain)} (${a.realisable ? 'the ideal can be had' : `the ideal would have to act ${minutes(a.late)} sooner`}; ${a.assumed ? 'analyser assumed' : 'analyser as stated'} every ${minutes(a.analyser.every)}, ${minutes(a.analyser.delay)} late): worst ${figure(a.proof.worst)} g/L, ${figure(a.proof.beyond, 2)} kg above; with lead ${minutes(a.lead)} and lag ${minutes(a.lag)} ${figure(a.shaped.worst)} g/L`,
  );
  if (b) {
    const sigma = `noise moves the outlet by ${figure(b.sigma, 2)} g/L (one sigma)`;
    if (best.worst > b.limit)
      lines.push(
        `Feedback alone does NOT keep ${withUnit(b.limit, 'kg/m^3')}: ${b.setPoint === null ? 'no set point down to half of it does' : `keep at ${figure(b.setPoint)} g/L instead: ${cost(r, loop)}`}; ${sigma}.`,
      );
    else if (b.setPoint !== null && b.setPoint > loop.keepAt * 1.005)
      lines.push(
        `It keeps ${withUnit(b.limit, 'kg/m^3')} even at a set point of ${figure(b.setPoint)} g/L: ${cost(r, loop)}; ${sigma}.`,
      );
    else lines.push(`It keeps ${withUnit(b.limit, 'kg/m^3')}, with nothing to give away; ${sigma}.`);
  }
  for (const h of helps) lines.push(`With ${h}.`);
  return lines;
}

function cost(r: Tuned, loop: Loop): string {
  const b = r.backOff;
  if (!b) return '';
  const by = `${outputText(loop, Math.abs(b.output))} ${b.output >= 0 ? 'more' : 'less'} output`;
  return loop.move.kind === 'set point'
    ? by
    : `${by}, ${withUnit(Math.abs(b.flow), 'm^3/s')} ${b.flow >= 0 ? 'more' : 'less'} solvent at rest`;
}

/** Settings by place where one set cannot serve: SIMC along the output, at the scenario's throughput and grade. */
function schedule(r: Tuned, loop: Loop): string[] {
  if (r.map.unsafe.length === 0 && r.map.signChanges.length === 0) return [];
  const factor = loop.move.kind === 'flow' ? 3600 : 1;
  const rows = r.map.points.filter((p) => p.local && p.margins);
  const worst = (list: readonly MapPoint[]): MapPoint =>
    list.reduce((a, b) => (Math.abs(b.gain as number) > Math.abs(a.gain as number) ? b : a));
  const cases = [...new Set(rows.map((p) => `${p.throughput} ${p.grade}`))];
  return [
    'Gain schedule (SIMC at the steepest point of each case; in summary.json point by point):',
    ...columns([
      ['', 'throughput', 'grade', 'plant gain', 'controller gain', 'int. min', 'Ms of the chosen'],
      ...cases.map((q) => {
        const p = worst(rows.filter((o) => `${o.throughput} ${o.grade}` === q));
        return [
          ' ',
          `${figure(100 * p.throughput)} %`,
          `${figure(100 * p.grade)} %`,
          figure((p.gain as number) / factor),
          figure((p.local?.gain ?? 0) * factor),
          figure((p.local?.integralTime ?? 0) / 60, 2),
          p.margins?.stable ? figure(p.margins.sensitivity) : 'unstable',
        ];
      }),
    ]),
  ];
}

function tests(r: Tuned, loop: Loop): string[] {
  const told = [...r.tests, ...(r.real ? [r.real] : [])].flatMap((t) =>
    t.fit === null
      ? []
      : [
          `${t.name} ${gainText(loop, 1 / t.fit.gain, true)}, lag ${minutes(t.fit.lag)}, delay ${minutes(t.fit.delay)} (off ${figure(100 * t.fit.error, 2)} %${t.name === 'real' ? twoPoints(t) : ''})`,
        ],
  );
  return told.length === 0 ? [] : [`Step tests: ${told.join('; ')}. Tuned on the larger gain.`];
}

/** What two published two-point methods make of a test beside least squares. */
const twoPoints = (t: Tested): string =>
  [
    { by: 'Smith', p: t.smith },
    { by: 'Sundaresan and Krishnaswamy', p: t.sundaresanKrishnaswamy },
  ]
    .map(({ by, p }) => (p === null ? '' : `; ${by} ${minutes(p.lag)}, ${minutes(p.delay)}`))
    .join('');

/** A feedforward gain on a flow: output per m³/h of it. */
const flowGain = (loop: Loop, gain: number): string =>
  loop.move.kind === 'flow'
    ? `${figure(gain)} m^3/h per m^3/h`
    : `${figure(gain / 3600)} ${loop.move.kind === 'ratio' ? 'ratio' : 'g/L'} per m^3/h`;
