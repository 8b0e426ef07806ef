/** Exit codes of the command, stated once; README's table is tested against them. */
export const exits = {
  done: 0,
  refused: 1,
  usage: 2,
  incomplete: 3,
  bug: 4,
  interrupted: 130,
} as const;

/** Something that the user can mend; shown without a stack. */
export class Known extends Error {
  override readonly name = 'Known';
  readonly code: number;

  constructor(message: string, code: number) {
    super(message);
    this.code = code;
  }
}
