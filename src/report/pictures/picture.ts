import type { ChartConfiguration } from 'chart.js';

/** One kind of picture: from a result to the description of a chart. A new one is a file and a line in the table. */
export interface Picture<R> {
  readonly name: (r: R, part?: Part) => string;
  /** The trains and solutes for which it is drawn; once for the whole plant where it says nothing. */
  readonly parts?: (r: R) => readonly Part[];
  readonly config: (r: R, part?: Part) => ChartConfiguration;
}

export interface Part {
  readonly train: string;
  readonly solute: string;
}

/** Names become file names: letters and digits stay, the rest turns into dashes. */
export const fileName = (...parts: string[]): string =>
  `${parts
    .map((p) =>
      p
        .toLowerCase()
        .replace(/[^\p{L}\p{N}]+/gu, '-')
        .replace(/^-|-$/g, ''),
    )
    .join('-')}.png`;
