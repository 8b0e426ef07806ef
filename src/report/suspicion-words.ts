import type { Suspicious } from '../study/check/suspicious.ts';
import { clock, figure } from './figures.ts';

interface Words {
  /** What the figure is, for `title value unit`. */
  readonly title: string;
  readonly say: (v: number) => string;
  readonly low: string;
  readonly high: string;
}

const percent = (v: number): string => `${figure(100 * v)} %`;
const centimetres = (v: number): string => `${figure(100 * v)} cm`;

const words: Record<Suspicious['what'], Words> = {
  mixerTime: {
    title: 'mixer time',
    say: clock,
    low: 'look at the volume of the mixer and at the units of the flows; drops need time to form',
    high: 'look at the volume of the mixer and at the units of the flows',
  },
  mixerRatio: {
    title: 'O/A in the mixer',
    say: (v) => figure(v),
    low: 'look at the flows; if organic is returned to the mixer, state it, such as recycle: {hold: 1.0}',
    high: 'look at the flows; if aqueous is returned to the mixer, state it, such as recycle: {hold: 1.0}',
  },
  settlerLoad: {
    title: 'settler load',
    say: (v) => `${figure(3600 * v)} m/h`,
    low: 'look at the area of the settler: a settler this large holds up every change for long',
    high: 'look at the area of the settler and at the units of the flows; a band of this load may flood',
  },
  band: {
    title: 'dispersion band',
    say: centimetres,
    low: '',
    high: 'look at thickness, at and exponent of the band; a larger area or a coalescer thins it',
  },
  bandShare: {
    title: 'share of its layer that the band takes',
    say: percent,
    low: '',
    high: 'deepen the layer of the continuous phase or enlarge the area: a little more flow floods it',
  },
  efficiency: {
    title: 'stage efficiency',
    say: percent,
    low: 'look at ka, stage_efficiency or the impeller, and at the volume of the mixer',
    high: 'look at ka, stage_efficiency or the impeller: few plants come this near to equilibrium',
  },
  tipSpeed: {
    title: 'tip speed of the impeller',
    say: (v) => `${figure(v)} m/s`,
    low: 'look at speed and diameter: part of the dispersed phase may stay undispersed',
    high: 'look at speed and diameter: drops this fine settle slowly and are carried over',
  },
  load: {
    title: 'loading of the organic',
    say: percent,
    low: '',
    high: 'look at the organic flow and at capacity or extractant: a richer feed finds no room any more',
  },
};

/** `extraction.2: mixer time 12 s (usual 1 min to 5 min): look at …` */
export function suspicionLine(q: Suspicious): string {
  const { title, say, low, high } = words[q.what];
  const usual = q.low > 0 ? `usual ${say(q.low)} to ${say(q.high)}` : `usual up to ${say(q.high)}`;
  const of = q.solute === null ? '' : ` (${q.solute})`;
  return `  ${placeOf(q)}: ${title}${of} ${say(q.value)}, ${usual}: ${q.tooHigh ? high : low}`;
}

function placeOf({ train, stages, of }: Suspicious): string {
  if (of === 1 || stages.length === of) return train;
  if (stages.length === 1) return `${train}.${stages[0]}`;
  const list = stages.length > 4 ? `${stages.slice(0, 3).join(', ')} …` : stages.join(', ');
  return `${train}, stages ${list}`;
}
