import type { Target } from './outline.ts';
import { isObject } from './outline-circuit.ts';

/** What may be changed about the loops of a file: set point, mode, limits, and the output while in manual. */
export function loopTargets(loops: unknown, limitable: ReadonlyMap<string, Target>): [string, Target][] {
  if (!isObject(loops)) return [];
  return Object.entries(loops).flatMap(([name, loop]): [string, Target][] => {
    if (!isObject(loop)) return [];
    const measured = isObject(loop.measure) ? limitable.get(String(loop.measure.of)) : undefined;
    const move = isObject(loop.move) ? loop.move : {};
    const output: [string, Target][] =
      typeof move.ratio === 'string'
        ? [[`${name}.output`, { what: 'output', phase: 'organic' }]]
        : typeof move.flow === 'string'
          ? [[`${name}.output`, { what: 'flow', phase: 'organic' }]]
          : [];
    return [
      [`${name}.mode`, { what: 'mode', phase: 'aqueous' }],
      ...(measured ? [[`${name}.set point`, measured] as [string, Target]] : []),
      ...output,
      ...output.flatMap(([, t]) => ['low', 'high'].map((bound): [string, Target] => [`${name}.${bound}`, t])),
    ];
  });
}
