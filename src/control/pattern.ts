import type { Pattern } from '../solve/system.ts';

/** Gathers the columns of each row of a sparse matrix, in any order and as often as they come. */
export class PatternBuilder {
  readonly #rows: Set<number>[];

  constructor(rows: number) {
    this.#rows = Array.from({ length: rows }, () => new Set<number>());
  }

  add(row: number, column: number): { row: number; column: number } {
    this.#rows[row].add(column);
    return { row, column };
  }

  pattern(): Pattern {
    const rowStart = new Int32Array(this.#rows.length + 1);
    const sorted = this.#rows.map((r, i) => {
      rowStart[i + 1] = rowStart[i] + r.size;
      return [...r].sort((a, b) => a - b);
    });
    return { rowStart, column: Int32Array.from(sorted.flat()) };
  }
}
