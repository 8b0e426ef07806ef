import { add, div, type Expr, mul, sub } from '../math/expression.ts';
import { kernel } from '../math/kernel.ts';
import { perVolume } from './kernels.ts';
import { aqueousOverWeir, legLevel, level, organicThroughPort, overWeir } from './weir-law.ts';

/**
 * Outlets of a settler with weirs: aqueous leg and organic weir from the volumes it holds, m³/s.
 *
 * Levels: z_t = (V_a + V_o)/A on top, z_i = V_a/A at the interface (the band counted with its phases), and in the aqueous
 * leg z_leg = z_i + (z_t − z_i)·ρ_o/ρ_a − losses. Each outlet is Q = C·L·h^1.5 over its crest. The underflow draws organic
 * once the interface is down at its port, the organic weir aqueous once the interface is up at its crest. The levels
 * count what is still in the band, which weighs and stands, but only what has cleared can leave.
 *
 * Outputs: aqueous in the underflow, organic in it, organic over the weir, aqueous over it, z_t, z_i.
 */
export const settlerOutlets = kernel(
  'settler outlets',
  [
    ...['aqueous', 'organic', 'area', 'density ratio', 'loss', 'port'],
    ...['aqueous crest', 'organic crest', 'aqueous length', 'organic length'],
    ...['aqueous available', 'organic available'],
  ],
  (Va, Vo, A, ratio, loss, port, za, zo, La, Lo, clearAqueous, clearOrganic) => {
    const top = level(A, Va, Vo);
    const interfaceLevel = level(A, Va);
    const leg = legLevel(interfaceLevel, level(A, Vo), ratio, loss);
    const under = overWeir(La, sub(leg, za));
    const over = overWeir(Lo, sub(top, zo));
    const organicBelow = organicThroughPort(interfaceLevel, port);
    const aqueousAbove = aqueousOverWeir(interfaceLevel, zo);
    return [
      mul(under, sub(1, organicBelow), clearAqueous),
      mul(under, organicBelow, clearOrganic),
      mul(over, sub(1, aqueousAbove), clearOrganic),
      mul(over, aqueousAbove, clearAqueous),
      top,
      interfaceLevel,
    ];
  },
);

/** Share of a mixer that overflows a second: C·L·(z − crest)^1.5/V, z = (V_a + V_o)/A. */
export const mixerOverflow = kernel(
  'mixer weir',
  ['aqueous', 'organic', 'area', 'crest', 'length', 'least'],
  (Va, Vo, A, crest, L, least) => {
    const V: Expr = add(Va, Vo);
    return mul(overWeir(L, sub(div(V, A), crest)), perVolume(V, least));
  },
);
