import { type Batch, type Sample, samples } from './sample.ts';

/** What a worker of the pool runs: a batch of samples in, their results out. */
export default function work(batch: Batch): Sample[] {
  return samples(batch);
}
