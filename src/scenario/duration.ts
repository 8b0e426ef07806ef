const SECONDS: Readonly<Record<string, number>> = { w: 604800, d: 86400, h: 3600, m: 60, s: 1 };
const PART =
  /^(\d+\.?\d*(?:[eE][+-]?\d+)?)\s*(weeks?|days?|d|hours?|hrs?|h|minutes?|mins?|min|seconds?|secs?|s)(?![A-Za-z])\s*/;

/** `12 h 40 min` in seconds, or null where the text is no such sum. */
export function duration(text: string): number | null {
  const sign = text.startsWith('-') ? -1 : 1;
  let rest = text.replace(/^[+-]/, '').trim();
  if (rest === '') return null;
  let total = 0;
  while (rest !== '') {
    const part = PART.exec(rest);
    if (!part) return null;
    total += Number(part[1]) * SECONDS[part[2][0]];
    rest = rest.slice(part[0].length);
  }
  return sign * total;
}
