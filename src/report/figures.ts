/** How SI values are written for people: unit shown, factor from SI. */
const SHOWN: Record<string, { unit: string; factor: number }> = {
  'kg/m^3': { unit: 'g/L', factor: 1 },
  'm^3/s': { unit: 'm^3/h', factor: 3600 },
  'm^3': { unit: 'm^3', factor: 1 },
  s: { unit: 'h', factor: 1 / 3600 },
  'kg/s': { unit: 'kg/h', factor: 3600 },
  'm^3/m^3': { unit: 'mL/m^3', factor: 1e6 },
  '1/s': { unit: 'rpm', factor: 60 },
  W: { unit: 'kW', factor: 1e-3 },
};

export const shown = (unit: string): { unit: string; factor: number } => SHOWN[unit] ?? { unit, factor: 1 };

/** Three or four significant digits, without an exponent where people would not write one. */
export function figure(value: number, digits = 3): string {
  if (value === 0) return '0';
  if (!Number.isFinite(value)) return String(value);
  const size = Math.abs(value);
  if (size < 1e-4 || size >= 1e7) return value.toExponential(digits - 1);
  const decimals = Math.max(0, digits - 1 - Math.floor(Math.log10(size)));
  return value.toFixed(Math.min(decimals, 8));
}

/** A value in SI with its shown unit: `0.720 g/L`. */
export function withUnit(value: number, unit: string, digits = 3): string {
  const s = shown(unit);
  return `${figure(value * s.factor, digits)}${s.unit === '' ? '' : ` ${s.unit}`}`;
}

/** A time as people say it: `17 h 54 min`, `2 d 3 h`, `40 min`, `25 s`. */
export function clock(seconds: number): string {
  const sign = seconds < 0 ? '-' : '';
  const s = Math.abs(seconds);
  if (s < 60) return `${sign}${figure(s, 2)} s`;
  const minutes = Math.round(s / 60);
  const d = Math.floor(minutes / 1440);
  const h = Math.floor((minutes % 1440) / 60);
  const m = minutes % 60;
  if (s >= 4 * 86400) return `${sign}${d} d ${h} h`;
  const hours = d * 24 + h;
  return (
    sign +
    (hours === 0 ? `${m} min` : m === 0 ? `${hours} h` : `${hours} h ${String(m).padStart(2, '0')} min`)
  );
}

/** Columns of text, the first flush left, the others flush right. */
export function columns(rows: readonly (readonly string[])[], indent = '  '): string[] {
  const widths = rows.reduce<number[]>((w, r) => r.map((c, i) => Math.max(w[i] ?? 0, c.length)), []);
  return rows.map((r) =>
    (indent + r.map((c, i) => (i === 0 ? c.padEnd(widths[i]) : c.padStart(widths[i]))).join('  ')).trimEnd(),
  );
}
