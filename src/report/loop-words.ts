import type { Loop } from '../scenario/loops.ts';
import type { LoopReport } from '../study/control/report.ts';
import type { LoopAtRest } from '../study/control/settle.ts';
import { clock, figure, withUnit } from './figures.ts';

/** `43 min`, or `4.5 min` where that says more. */
export const minutes = (s: number): string => (s < 1 ? '0 min' : `${figure(s / 60, s < 6000 ? 2 : 3)} min`);

/** An output as people say it: a plain ratio, a flow, or a concentration. */
export const outputText = (loop: Loop, u: number): string =>
  loop.move.kind === 'ratio' ? figure(u) : withUnit(u, loop.move.kind === 'flow' ? 'm^3/s' : 'kg/m^3');

/** A controller gain, or with `plant` the inverse: the gain of the plant that belongs to it. */
export function gainText(loop: Loop, gain: number, plant = false): string {
  const { kind } = loop.move;
  const unit = { ratio: 'ratio', flow: 'm^3/h', 'set point': 'g/L' }[kind];
  const value = kind === 'flow' ? gain * 3600 : gain;
  return plant ? `${figure(1 / value)} g/L per ${unit}` : `${figure(value)} ${unit} per g/L`;
}

/** A loop read back in words, as it was understood. */
export function loopLines(l: Loop): string[] {
  const { measure: m, move, controller: c, feedforward: f } = l;
  const a = m.analyser;
  const noise =
    'share' in a.noise
      ? a.noise.share > 0
        ? `, noise ${figure(100 * a.noise.share)} % of reading`
        : ''
      : a.noise.absolute > 0
        ? `, noise ${withUnit(a.noise.absolute, 'kg/m^3')}`
        : '';
  const dropout =
    a.dropout > 0
      ? `, ${figure(100 * a.dropout)} % fail (${a.onBad === 'hold' ? 'the last holds' : 'to manual'})`
      : '';
  const target =
    move.kind === 'ratio'
      ? `the ratio ${move.quantity} / ${move.over}`
      : move.kind === 'flow'
        ? move.quantity
        : `the set point of ${move.quantity}`;
  const per = (v: number): string => `${outputText(l, v * 60)} per min`;
  const slew = [move.slewUp, move.slewDown].some(Number.isFinite)
    ? `, slew ${per(move.slewUp)}${move.slewDown === move.slewUp ? '' : ` up, ${per(move.slewDown)} down`}`
    : '';
  const lags = [
    ...(move.flowLag > 0 ? [`flow lag ${clock(move.flowLag)}`] : []),
    ...(move.flowFilter > 0 ? [`measured flow filtered over ${clock(move.flowFilter)}`] : []),
  ];
  const pid = c.derivativeTime > 0 ? 'PID' : 'PI';
  const rises =
    c.action === 'direct'
      ? 'output rises when the measurement rises'
      : 'output falls when the measurement rises';
  return [
    `  ${l.name} keeps ${m.of} at ${withUnit(l.keepAt, 'kg/m^3')}${c.auto ? '' : ' once put in automatic; now in MANUAL'}`,
    `    measures a ${a.takes} every ${clock(a.every)}, first at ${clock(a.first)}, known ${clock(a.delay)} later${noise}${dropout}`,
    `    moves ${target} between ${outputText(l, move.low)} and ${outputText(l, move.high)}${flowLimits(move)}${slew}${lags.length > 0 ? `; ${lags.join(', ')}` : ''}`,
    `    ${pid} ${c.scan === null ? 'on each result' : `every ${clock(c.scan)}`}, ${c.action}: ${rises}; gain ${gainText(l, c.gain)}, integral time ${minutes(c.integralTime)}${c.derivativeTime > 0 ? `, derivative time ${minutes(c.derivativeTime)}` : ''}${c.filter > 0 ? `, filter ${minutes(c.filter)}` : ''}${c.setPointWeight === 1 ? '' : `, set-point weight ${figure(c.setPointWeight)}`}`,
    ...(f
      ? [
          `    feedforward from ${f.from}, every ${clock(f.analyser.every)}, ${clock(f.analyser.delay)} late: ${f.form === 'multiply' ? 'output in proportion to it' : gainText(l, f.gain)}${f.lead + f.lag > 0 ? `, lead ${minutes(f.lead)}, lag ${minutes(f.lag)}` : ''}`,
        ]
      : []),
    ...l.changes.map((q) => {
      const aside = q.quantity === move.quantity ? `, ${l.name} out of it meanwhile` : '';
      const back = q.lasts === null ? '' : `, for ${clock(q.lasts)}`;
      return `    ${clock(q.at)}: ${q.words}${back}${aside}`;
    }),
  ];
}

/** Limits of the flow that a ratio sets, where they are stated. */
function flowLimits({ flowLow, flowHigh }: Loop['move']): string {
  const said = [
    ...(flowLow > 0 ? [`at least ${withUnit(flowLow, 'm^3/s')}`] : []),
    ...(flowHigh < Infinity ? [`at most ${withUnit(flowHigh, 'm^3/s')}`] : []),
  ];
  return said.length > 0 ? `, the flow ${said.join(' and ')}` : '';
}

/** Loops at a steady state. */
export const restLines = (loops: readonly Loop[], at: readonly LoopAtRest[]): string[] =>
  at.map((q, i) => {
    const l = loops[i];
    const out = `output ${outputText(l, q.output)}`;
    if (!q.automatic)
      return `${q.name} in manual, ${out}: ${l.measure.of} ${withUnit(q.measurement, 'kg/m^3')} (set point ${withUnit(q.setPoint, 'kg/m^3')})`;
    if (q.binds === null)
      return `${q.name} keeps ${l.measure.of} at ${withUnit(q.measurement, 'kg/m^3')}: ${out}`;
    return `${q.name} CANNOT keep ${l.measure.of} at ${withUnit(q.setPoint, 'kg/m^3')}: the ${q.binds} limit binds, ${out}, ${withUnit(q.measurement, 'kg/m^3')} is reached; widen low and high, or move the set point`;
  });

/** Loops over a run. */
export const reportLines = (loops: readonly Loop[], reports: readonly LoopReport[]): string[] =>
  reports.map((r, i) => {
    const l = loops[i];
    const share = (s: number): string => `${figure((100 * s) / Math.max(1, r.automatic), 2)} %`;
    const bound = [
      ...(r.atLimit > 0.005 * r.automatic ? [`at a limit ${share(r.atLimit)} of the time`] : []),
      ...(r.slewing > 0.005 * r.automatic ? [`on its slew ${share(r.slewing)}`] : []),
    ];
    const failed = r.results.filter((q) => q.value === null).length;
    return `LOOP   ${r.name} ${r.automaticAtEnd ? 'in automatic' : 'in manual'} at the end, output ${outputText(l, r.outputAtEnd)}; travel ${outputText(l, r.travel)}${bound.length > 0 ? `, ${bound.join(', ')}` : ''}${failed > 0 ? `; ${failed} of ${r.results.length} results failed` : ''}`;
  });
