/** No label at the upper end of an axis: it would meet the lower one of the field above or beside it. */
export function inner(this: { min: number; max: number }, value: number | string): string | null {
  const v = Number(value);
  return v > this.max - (this.max - this.min) * 0.02 ? null : String(Number(v.toPrecision(6)));
}
