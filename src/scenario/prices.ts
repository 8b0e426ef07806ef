import type { Prices } from './commissioning.ts';
import { hint } from './nearest.ts';
import type { Problem } from './refusal.ts';
import { show } from './show.ts';

/** m³, kg and J of the units that prices are stated per. */
const PER: Readonly<Record<'volume' | 'mass' | 'energy', Readonly<Record<string, number>>>> = {
  volume: { 'm^3': 1, m3: 1, 'm³': 1, L: 1e-3 },
  mass: { kg: 1, g: 1e-3, t: 1e3 },
  energy: { kWh: 3.6e6, MWh: 3.6e9 },
};
const EXAMPLES = { volume: '2400 AUD/m^3', mass: '9 AUD/kg', energy: '0.15 AUD/kWh' } as const;
const PRICE = /^(\d+\.?\d*|\.\d+)\s*(\p{L}{1,5}|\p{Sc})\s*(?:\/|per\s)\s*(\S+)$/u;
const POWER = /^(\d+\.?\d*|\.\d+)\s*(W|kW|MW)$/;
const WATTS: Readonly<Record<string, number>> = { W: 1, kW: 1e3, MW: 1e6 };

/**
 * Prices by feed or outlet (per volume), solute (per mass) and energy, in one currency of the user's own; `power` is
 * what the plant draws. Complains in place.
 */
export function readPrices(
  raw: Readonly<Record<string, string | number>> | undefined,
  solutes: readonly string[],
  streams: readonly string[] | null,
  problems: Problem[],
): Prices | null {
  if (raw === undefined) return null;
  const byStream = new Map<string, number>();
  const bySolute = new Map<string, number>();
  let energy: number | null = null;
  let power: number | null = null;
  let currency: string | null = null;
  for (const [key, stated] of Object.entries(raw)) {
    const text = String(stated);
    const path = ['prices', key];
    if (key === 'power') {
      const [, number, unit] = POWER.exec(text.trim()) ?? [];
      if (number === undefined)
        problems.push({ path, message: `expected a power such as '120 kW', got ${show(text)}` });
      else power = Number(number) * WATTS[unit];
      continue;
    }
    const kind = key === 'energy' ? 'energy' : solutes.includes(key) ? 'mass' : 'volume';
    if (kind === 'volume' && streams !== null && !streams.includes(key)) {
      const message = `${show(key)} is no feed, outlet or solute, nor energy or power${hint(key, [...streams, ...solutes, 'energy', 'power'])}`;
      problems.push({ path, message, atKey: true });
      continue;
    }
    if (/\d,\d/.test(text)) {
      problems.push({ path, message: `${show(text)}: use a decimal point, not a comma` });
      continue;
    }
    const [, number, money, unit] = PRICE.exec(text.trim()) ?? [];
    const per = number === undefined || !Object.hasOwn(PER[kind], unit) ? null : PER[kind][unit];
    if (per === null) {
      const message = `expected a price per ${kind} such as '${EXAMPLES[kind]}', got ${show(text)}`;
      problems.push({ path, message });
      continue;
    }
    if (currency !== null && money !== currency)
      problems.push({
        path,
        message: `one currency for all prices: ${show(money)} stands beside ${show(currency)}`,
      });
    currency ??= money;
    const each = Number(number) / per;
    if (kind === 'energy') energy = each;
    else (kind === 'mass' ? bySolute : byStream).set(key, each);
  }
  return { currency: currency ?? '', streams: byStream, solutes: bySolute, energy, power };
}
