import type { Expr } from '../../math/expression.ts';

/** Concentrations at one point of a mixer, kg/m³: by index of solute and of species. */
export interface Local {
  readonly aqueous: readonly Expr[];
  readonly organic: readonly Expr[];
  readonly species: readonly Expr[];
}

/** A law at work for one solute, with its numbers as they travel through the System. */
export interface Member<L> {
  readonly solute: number;
  readonly law: L;
  readonly q: readonly Expr[];
}

export interface LawNumber {
  readonly name: string;
  readonly unit: string;
  readonly value: number;
}

/**
 * An equilibrium law in both directions. `peers` are all solutes of the train under the same kind of law, this
 * one included: they may compete. Each law rises; below zero it goes on with its slope at zero, and beyond an
 * overload by its tangent, so that a trial state outside its range is pulled back instead of failing.
 */
export interface LawKind<L> {
  numbers(law: L): readonly LawNumber[];
  /** What of the law is not a number: two trains with equal structure share their code. */
  structure(law: L): string;
  /** c*_a, the aqueous concentration in equilibrium with the organic as it is. */
  aqueous(self: Member<L>, at: Local, peers: readonly Member<L>[]): Expr;
  /** c*_o, the organic concentration in equilibrium with the aqueous as it is. */
  organic(self: Member<L>, at: Local, peers: readonly Member<L>[]): Expr;
}
