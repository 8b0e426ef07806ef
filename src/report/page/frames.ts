import type { Plant } from '../../plant/assemble.ts';
import type { Frames } from '../../study/frames.ts';
import { timeUnit } from '../pictures/time-axis.ts';
import { digits } from './sheets.ts';

/** Stage profiles and operating diagrams at moments, as plain data for the page; g/L. */
export interface PageFrames {
  readonly unit: string;
  readonly times: readonly number[];
  readonly trains: readonly {
    readonly train: string;
    readonly solute: string;
    readonly stages: number;
    /** Top of the profile's axis, and of the diagram's two. */
    readonly most: number;
    readonly reach: readonly [number, number];
    readonly profile: {
      readonly aqueous: readonly (readonly number[])[];
      readonly organic: readonly (readonly number[])[];
    };
    readonly diagram: readonly {
      readonly isotherm: readonly Pair[];
      readonly operating: readonly Pair[];
      readonly stages: readonly Pair[];
    }[];
  }[];
}
type Pair = readonly [number | null, number | null];

/** Points of an isotherm on the page. */
const CURVE = 28;
const ROOM = 1.08;

export function pageFrames(plant: Plant, { snapshots, diagrams }: Frames): PageFrames | null {
  if (snapshots.length < 2 || diagrams.length === 0) return null;
  const last = snapshots[snapshots.length - 1].time;
  const unit = timeUnit(last);
  const at = new Map(plant.system.outputs.map((o, i) => [o.path, i]));
  return {
    unit: unit.name,
    times: snapshots.map((q) => digits(q.time / unit.seconds)),
    trains: diagrams.map((d) => {
      const stages = d.moments[0].stages.length;
      const leaving = (phase: string): number[][] =>
        snapshots.map((q) =>
          Array.from({ length: stages }, (_, j) =>
            digits(q.outputs[at.get(`${d.train}.${j + 1}.settler.${phase}.${d.solute}`) as number]),
          ),
        );
      const profile = { aqueous: leaving('aqueous'), organic: leaving('organic') };
      const points = d.moments
        .flatMap((m) => [...m.operating, ...m.stages])
        .filter((p) => Number.isFinite(p.x));
      const largest = (list: readonly number[]): number => list.reduce((a, b) => Math.max(a, b), 1e-9);
      return {
        train: d.train,
        solute: d.solute,
        stages,
        most: top(largest([...profile.aqueous, ...profile.organic].flat())),
        reach: [top(largest(points.map((p) => p.x))), top(largest(points.map((p) => p.y)))],
        profile,
        diagram: d.moments.map((m) => ({
          isotherm: sparse(m.isotherm.map(pair)),
          operating: m.operating.map(pair),
          stages: m.stages.map(pair),
        })),
      };
    }),
  };
}

const pair = ({ x, y }: { readonly x: number; readonly y: number }): Pair =>
  Number.isFinite(x) && Number.isFinite(y) ? [digits(x), digits(y)] : [null, null];

const sparse = (list: readonly Pair[]): Pair[] => {
  const every = Math.max(1, Math.floor(list.length / CURVE));
  return list.filter((_, i) => i % every === 0 || i === list.length - 1);
};

/** A round number a little above. */
function top(v: number): number {
  const step = 10 ** Math.floor(Math.log10(v)) / 5;
  return digits(Math.ceil((ROOM * v) / step) * step);
}
