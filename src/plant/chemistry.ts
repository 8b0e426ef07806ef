import { add, type Expr, mul, sub } from '../math/expression.ts';
import { formulaName } from '../scenario/names.ts';
import type { Law, Scenario, Train } from '../scenario/scenario.ts';
import { lawKinds } from './laws/index.ts';
import type { LawKind, LawNumber, Local, Member } from './laws/law.ts';

/** The laws of one train at work on expressions. */
export interface Chemistry {
  /** Solutes that transfer in this train. */
  readonly solutes: readonly number[];
  /** Numbers of all laws, solute after solute. */
  readonly numbers: readonly (LawNumber & { readonly solute: number })[];
  readonly structure: string;
  /** c*_a or c*_o of a transferring solute; `q` holds the numbers in the order of `numbers`. */
  equilibrium(solute: number, side: 'aqueous' | 'organic', at: Local, q: readonly Expr[]): Expr;
}

/** The laws of a train or a batch, one for each solute that transfers there. */
export function chemistry(s: Scenario, equilibrium: Train['equilibrium']): Chemistry {
  const names = [...s.solutes, ...s.species].map(formulaName);
  const lookup = (name: string, at: Local): Expr => {
    const i = names.indexOf(name);
    return i < s.solutes.length ? at.aqueous[i] : at.species[i - s.solutes.length];
  };
  const kinds = lawKinds(lookup);
  const kindOf = (law: Law): LawKind<Law> => kinds[law.law] as LawKind<Law>;
  const solutes = s.solutes.flatMap((_, i) => (equilibrium[i] ? [i] : []));
  const law = (i: number): Law => equilibrium[i] as Law;
  const numbers = solutes.flatMap((solute) =>
    kindOf(law(solute))
      .numbers(law(solute))
      .map((q) => ({ ...q, solute })),
  );
  const members = (q: readonly Expr[]): Member<Law>[] =>
    solutes.map((solute) => ({
      solute,
      law: law(solute),
      q: q.filter((_, k) => numbers[k].solute === solute),
    }));
  return {
    solutes,
    numbers,
    structure: solutes.map((i) => `${i}:${law(i).law}(${kindOf(law(i)).structure(law(i))})`).join(';'),
    equilibrium(solute, side, at, q) {
      const all = members(q);
      const self = all.find((m) => m.solute === solute) as Member<Law>;
      const peers = all.filter((m) => m.law.law === self.law.law);
      return kindOf(self.law)[side](self, at, peers);
    },
  };
}

/** Species concentrations in an aqueous vessel from w and the solutes: (w − Σ r·m_a)/V. */
export function speciesFrom(
  carriers: readonly Expr[],
  amounts: readonly Expr[],
  releases: readonly (readonly (Expr | null)[])[],
  perVolume: Expr,
): Expr[] {
  return carriers.map((w, k) => {
    const bound = amounts.flatMap((m, i) => {
      const r = releases[i][k];
      return r === null ? [] : [mul(r, m)];
    });
    return mul(sub(w, add(...bound)), perVolume);
  });
}
