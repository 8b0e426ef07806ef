import type { Phase } from '../scenario/scenario.ts';

export type Of<T> = Readonly<Record<Phase, T>>;
export const PHASES = ['aqueous', 'organic'] as const;
export const otherPhase = (phase: Phase): Phase => (phase === 'aqueous' ? 'organic' : 'aqueous');
export const forBoth = <T>(f: (phase: Phase) => T): Of<T> => ({
  aqueous: f('aqueous'),
  organic: f('organic'),
});
