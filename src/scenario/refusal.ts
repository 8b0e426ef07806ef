import type { Path } from './scenario.ts';

/** One thing that is wrong with a scenario, and where. */
export interface Problem {
  readonly path: Path;
  /** What is wrong, what was expected, and the offending value. */
  readonly message: string;
  /** The complaint is about the key at the end of the path, not about its value. */
  readonly atKey?: boolean;
}

/** A scenario is refused: all that is wrong with it, at once. */
export class Refusal extends Error {
  override readonly name = 'Refusal';
  readonly problems: readonly Problem[];

  constructor(problems: readonly Problem[]) {
    super(problems.map((p) => `${p.path.join('.')}: ${p.message}`).join('\n'));
    this.problems = problems;
  }
}
