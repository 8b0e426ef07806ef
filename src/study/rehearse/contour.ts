/** A point of a map. */
export interface MapPoint {
  readonly start: number;
  readonly size: number;
}

/**
 * Pieces of the contour on which a map passes a level: marching squares, straight lines within each cell of four
 * neighbours; where two opposite corners lie beyond it, the mean of the four decides which of them belong together.
 * Reference: W. E. Lorensen and H. E. Cline, Comput. Graph. 21(4), 163 (1987), in two dimensions.
 *
 * @param values by row (y) and column (x).
 */
export function contourPieces(
  x: readonly number[],
  y: readonly number[],
  values: readonly (readonly number[])[],
  level: number,
): [MapPoint, MapPoint][] {
  const pieces: [MapPoint, MapPoint][] = [];
  for (let k = 0; k + 1 < y.length; k++)
    for (let i = 0; i + 1 < x.length; i++) {
      const corners = [
        [i, k],
        [i + 1, k],
        [i + 1, k + 1],
        [i, k + 1],
      ].map(([c, r]) => ({ start: x[c], size: y[r], v: values[r][c] - level }));
      if (corners.some((c) => !Number.isFinite(c.v))) continue;
      const cuts = corners.flatMap((a, e) => {
        const b = corners[(e + 1) % 4];
        if (a.v > 0 === b.v > 0) return [];
        const s = a.v / (a.v - b.v);
        return [{ start: a.start + s * (b.start - a.start), size: a.size + s * (b.size - a.size) }];
      });
      if (cuts.length === 2) pieces.push([cuts[0], cuts[1]]);
      if (cuts.length === 4) {
        const middle = corners.reduce((sum, c) => sum + c.v, 0) > 0;
        const joined = middle === corners[0].v > 0;
        pieces.push(joined ? [cuts[0], cuts[1]] : [cuts[3], cuts[0]]);
        pieces.push(joined ? [cuts[2], cuts[3]] : [cuts[1], cuts[2]]);
      }
    }
  return pieces;
}
