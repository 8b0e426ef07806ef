/** Ranks from 1, equal values sharing the mean of theirs. */
export function ranks(values: readonly number[]): number[] {
  const order = values.map((v, i) => ({ v, i })).sort((a, b) => (a.v === b.v ? 0 : a.v < b.v ? -1 : 1));
  const rank = new Array<number>(values.length);
  for (let from = 0; from < order.length; ) {
    let to = from + 1;
    while (to < order.length && order[to].v === order[from].v) to += 1;
    for (let k = from; k < to; k++) rank[order[k].i] = (from + 1 + to) / 2;
    from = to;
  }
  return rank;
}

/** C. Spearman's rank correlation (1904): the product-moment correlation of the ranks; 0 where one of them is constant. */
export function rankCorrelation(x: readonly number[], y: readonly number[]): number {
  const [a, b] = [ranks(x), ranks(y)];
  const middle = (x.length + 1) / 2;
  let [xy, xx, yy] = [0, 0, 0];
  a.forEach((v, i) => {
    xy += (v - middle) * (b[i] - middle);
    xx += (v - middle) ** 2;
    yy += (b[i] - middle) ** 2;
  });
  return xx > 0 && yy > 0 ? xy / Math.sqrt(xx * yy) : 0;
}

/**
 * Quantile by a straight line between order statistics, definition 7 of R. J. Hyndman and Y. Fan, Am. Stat. 50, 361
 * (1996). `sorted` may end in Infinity; then so may the quantile.
 */
export function quantile(sorted: ArrayLike<number>, share: number): number {
  const at = (sorted.length - 1) * share;
  const lo = Math.floor(at);
  const part = at - lo;
  return part === 0 ? sorted[lo] : sorted[lo] + part * (sorted[lo + 1] - sorted[lo]);
}
