import { type MapBatch, type MapCell, mapColumns } from './map.ts';

/** What a worker of the pool runs: some columns of a map in, their values out. */
export default function work(batch: MapBatch): MapCell[][] {
  return mapColumns(batch);
}
