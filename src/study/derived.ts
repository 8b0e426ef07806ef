import type { Plant } from '../plant/assemble.ts';
import type { F } from '../solve/system.ts';
import { trainStreams } from './train-streams.ts';

/** A figure that people look for and that follows from a row of outputs. */
export interface Derived {
  readonly path: string;
  /** SI. */
  readonly unit: string;
  value(row: F): number;
}

/**
 * Figures of every train that move: kg/s transferred, recovery, net transfer (loaded less lean organic), and the
 * organic lost with the aqueous outlet per volume of it.
 */
export function derivedFigures(plant: Plant): Derived[] {
  const { scenario: s, system } = plant;
  const at = new Map(system.outputs.map((o, i) => [o.path, i]));
  const reader = (path: string): ((row: F) => number) => {
    const i = at.get(path);
    return i === undefined ? () => 0 : (row) => row[i];
  };
  /** Σ flow · content of some streams, kg/s. */
  const carries = (streams: readonly string[], solute: string): ((row: F) => number) => {
    const parts = streams.map((n) => ({ flow: reader(`${n}.flow`), content: reader(`${n}.${solute}`) }));
    return (row) => parts.reduce((n, q) => n + q.flow(row) * q.content(row), 0);
  };
  return s.trains.flatMap((t, index) => {
    const organic = trainStreams(t, index, plant.network, 'organic');
    const aqueous = trainStreams(t, index, plant.network, 'aqueous');
    const perSolute = s.solutes.flatMap((solute, i): Derived[] => {
      if (!t.equilibrium[i]) return [];
      const c = {
        lean: reader(`${t.organic.from}.${solute}`),
        loaded: reader(`${t.organic.to}.${solute}`),
      };
      const [brought, taken, fed] = [
        carries(organic.in, solute),
        carries(organic.out, solute),
        carries(aqueous.in, solute),
      ];
      const transferred = (row: F): number => taken(row) - brought(row);
      const share = (row: F): number => {
        const rate = transferred(row);
        const offered = rate >= 0 ? fed(row) : brought(row);
        return offered > 0 ? Math.abs(rate) / offered : 0;
      };
      return [
        { path: `${t.name}.transferred.${solute}`, unit: 'kg/s', value: transferred },
        { path: `${t.name}.recovery.${solute}`, unit: '%', value: (row) => 100 * share(row) },
        {
          path: `${t.name}.net transfer.${solute}`,
          unit: 'kg/m^3',
          value: (row) => c.loaded(row) - c.lean(row),
        },
      ];
    });
    const carried = at.get(`${t.aqueous.to}.carried organic`);
    const out = reader(`${t.aqueous.to}.flow`);
    const loss: Derived[] =
      carried === undefined
        ? []
        : [
            {
              path: `${t.name}.solvent lost per aqueous`,
              unit: 'm^3/m^3',
              value: (row) => (out(row) > 0 ? row[carried] / out(row) : 0),
            },
          ];
    return [...perSolute, ...loss];
  });
}
