import type { Tuned } from '../../study/tune/tune.ts';
import { bode } from './bode.ts';
import { closedLoops } from './closed-loops.ts';
import { all, type Drawn } from './index.ts';
import { marginMap } from './margin-map.ts';
import { nyquist } from './nyquist.ts';
import type { Picture } from './picture.ts';
import { stepTests } from './step-tests.ts';

/** Pictures of `tune`, in the order in which they are drawn. */
export const tuneTable: readonly Picture<Tuned>[] = [closedLoops, stepTests, nyquist, bode, marginMap];

export const tunePictures = (r: Tuned, scale = 1): AsyncGenerator<Drawn> => all(tuneTable, r, scale);
