import { type Address, functionsFor, type Instance } from '../math/machine/affine.ts';
import { BASE, Code } from '../math/machine/module.ts';
import { TINY } from './elimination.ts';
import type { EliminationPlan } from './elimination-plan.ts';
import type { Pattern } from './system.ts';

/** Where the arrays of an elimination begin, in numbers from the start of the region. */
export interface EliminationPlaces {
  /** Values of A on its pattern. */
  readonly a: number;
  /** Values of the forward and the backward list, then pivots. */
  readonly v: number;
  /** Reciprocal pivots. */
  readonly d: number;
  /** Right-hand side on entry, solution on return; the right-hand side as it was; what is left of it. */
  readonly x: number;
  readonly b: number;
  readonly r: number;
  readonly shift: number;
  /** Largest row-wise backward error. */
  readonly worst: number;
}

interface Operation extends Instance {
  readonly write: (code: Code, address: (k: number) => Address) => void;
}

const bytes = (place: number): number => 8 * place;
const load = (code: Code, { local, offset }: Address): Code => code.get(local).load(offset);
const written = (list: readonly Operation[]): Code[] =>
  functionsFor(list, (code, o, address) => {
    o.write(code, address);
  });

/**
 * Factors of shift·I − A as code: what `EliminationPlan.program` lists, row by row. Rows of one shape at even distances,
 * such as equal stages have, are one loop.
 */
export function factorCode(plan: EliminationPlan, at: EliminationPlaces): Code[] {
  const { program: p, load: loads, row, size } = plan;
  const pivots = row.length;
  const list: Operation[] = [];
  const clear = new Code(0)
    .get(BASE)
    .integerConstant(bytes(at.v))
    .addIntegers()
    .integerConstant(0)
    .integerConstant(bytes(pivots))
    .fill();
  for (let k = 0; k < size; k++)
    list.push({
      shape: 'shift',
      at: [bytes(at.v + pivots + k), bytes(at.shift)],
      write(code, address) {
        code.get(address(0).local);
        load(code, address(1)).store(address(0).offset);
      },
    });
  for (let k = 0; k < loads.length; k += 2)
    list.push({
      shape: 'load',
      at: [bytes(at.v + loads[k]), bytes(at.a + loads[k + 1])],
      write(code, address) {
        code.get(address(0).local);
        load(code, address(0));
        load(code, address(1)).binary('sub').store(address(0).offset);
      },
    });
  for (let k = 0; k < p.length; ) {
    const counts: number[] = [];
    const places: number[] = [];
    for (;;) {
      const [entry, pivot, count, upper] = [p[k], p[k + 1], p[k + 2], p[k + 3]];
      k += 4;
      counts.push(count);
      places.push(bytes(at.v + (entry < 0 ? pivots + pivot : entry)), bytes(at.d + pivot));
      for (let q = 0; q < count; q++) {
        if (entry >= 0) places.push(bytes(at.v + p[k + q]));
        places.push(bytes(at.v + upper + q));
      }
      if (entry < 0) break;
      k += count;
    }
    list.push({
      shape: counts.join(),
      at: places,
      write: (code, address) => eliminate(code, counts, address),
    });
  }
  return [clear, ...written(list)];
}

/** One row: what is eliminated of it with each row above, then its own pivot. */
function eliminate(code: Code, counts: readonly number[], address: (k: number) => Address): void {
  const a = code.spare(0);
  let k = 0;
  counts.forEach((count, i) => {
    const [entry, reciprocal] = [address(k), address(k + 1)];
    k += 2;
    if (i === counts.length - 1) {
      code.get(reciprocal.local).constant(1);
      load(code, entry).binary('div').tee(a).store(reciprocal.offset);
      for (let q = 0; q < count; q++, k++) {
        code.get(address(k).local);
        load(code, address(k)).get(a).binary('mul').store(address(k).offset);
      }
      return;
    }
    load(code, entry).set(a);
    code.get(entry.local).get(a);
    load(code, reciprocal).binary('mul').store(entry.offset);
    for (let q = 0; q < count; q++, k += 2) {
      const target = address(k);
      code.get(target.local);
      load(code, target).get(a);
      load(code, address(k + 1))
        .binary('mul')
        .binary('sub')
        .store(target.offset);
    }
  });
}

/** Solves with the factors, in place: forward, then each row scaled by its pivot and cleared of what is known by then. */
export function solveCode(plan: EliminationPlan, at: EliminationPlaces): Code[] {
  const { row, column, order, blocks, backward } = plan;
  const list: Operation[] = [];
  const terms = (from: number, target: number): number => {
    let f = from;
    while (f < row.length && row[f] === target) f += 1;
    return f;
  };
  const push = (target: number, from: number, to: number, scaled: boolean): void => {
    const places = [bytes(at.x + target), ...(scaled ? [bytes(at.d + target)] : [])];
    for (let f = from; f < to; f++) places.push(bytes(at.v + f), bytes(at.x + column[f]));
    list.push({
      shape: `${scaled ? 'scaled' : 'row'} ${to - from}`,
      at: places,
      write(code, address) {
        code.get(address(0).local);
        load(code, address(0));
        let k = 1;
        if (scaled) load(code, address(k++)).binary('mul');
        for (let q = from; q < to; q++) {
          load(code, address(k++));
          load(code, address(k++)).binary('mul').binary('sub');
        }
        code.store(address(0).offset);
      },
    });
  };
  let f = 0;
  let b = backward;
  for (let q = 0; q < blocks.length; q += 4) {
    while (f < blocks[q]) {
      const end = Math.min(blocks[q], terms(f, row[f]));
      push(row[f], f, end, false);
      f = end;
    }
    for (let i = blocks[q + 2] - 1; i >= blocks[q + 1]; i--) {
      const end = Math.min(blocks[q + 3], terms(b, order[i]));
      push(order[i], b, end, true);
      b = end;
    }
  }
  return written(list);
}

/** Leaves b − (shift·I − A)·x in r, and the largest row-wise backward error. */
export function measureCode(pattern: Pattern, at: EliminationPlaces): Code[] {
  const list: Operation[] = [];
  for (let i = 0; i + 1 < pattern.rowStart.length; i++) {
    const places = [at.x + i, at.b + i, at.r + i, at.shift, at.worst].map(bytes);
    const terms = pattern.rowStart[i + 1] - pattern.rowStart[i];
    for (let k = pattern.rowStart[i]; k < pattern.rowStart[i + 1]; k++)
      places.push(bytes(at.a + k), bytes(at.x + pattern.column[k]));
    list.push({
      shape: String(terms),
      at: places,
      write: (code, address) => residual(code, terms, address),
    });
  }
  const reset = new Code(0).get(BASE).constant(0).store(bytes(at.worst));
  return [reset, ...written(list)];
}

function residual(code: Code, terms: number, address: (k: number) => Address): void {
  const [term, left, size] = [code.spare(0), code.spare(1), code.spare(2)];
  const [x, b, r, shift, worst] = [0, 1, 2, 3, 4].map(address);
  load(code, shift);
  load(code, x).binary('mul').set(term);
  load(code, b).get(term).binary('sub').set(left);
  load(code, b).absolute().get(term).absolute().binary('add').set(size);
  for (let q = 0; q < terms; q++) {
    load(code, address(5 + 2 * q));
    load(code, address(6 + 2 * q))
      .binary('mul')
      .tee(term);
    code.get(left).binary('add').set(left);
    code.get(size).get(term).absolute().binary('add').set(size);
  }
  code.get(r.local).get(left).store(r.offset);
  code.get(worst.local);
  load(code, worst);
  // The larger of the two keeps what is no number.
  code.get(left).absolute().get(size).constant(TINY).binary('add').binary('div');
  code.binary('max').store(worst.offset);
}
