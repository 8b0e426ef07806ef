/** A kind of plant that a new scenario can begin with. */
export interface Starter {
  readonly name: string;
  /** In a line, for a list to choose from. */
  readonly what: string;
  /** Names of what transfers, as the starter has them. */
  readonly solutes: readonly string[];
  /** The commented scenario, with these names in place of its own. */
  text(names: StarterNames): string;
}

export interface StarterNames {
  readonly title: string;
  /** As many as the starter has. */
  readonly solutes: readonly string[];
}

/** A name or title as YAML reads it back, whatever is in it. */
export const quoted = (text: string): string =>
  /^[A-Za-z][\w ()/+-]*$/.test(text) && !RESERVED.test(text) ? text.trim() : JSON.stringify(text);

/** Words that YAML 1.2, or an older reader, would not take for a text. */
const RESERVED = /^(true|false|null|yes|no|on|off|y|n)$/i;

/** First lines of every starter. */
export const head = (title: string, solutes: readonly string[], about: string): string =>
  `title: ${quoted(title)}
about: ${about}
solutes: [${solutes.map(quoted).join(', ')}]`;

/** Last lines: how long, and how often a row is written. */
export const span = (horizon: string, every: string): string =>
  `horizon: ${horizon}                        # how long to run
record_every: ${every}                   # a row of series.csv; limits are watched in between as well`;
