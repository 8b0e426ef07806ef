import { scenarioJsonSchema } from '../../scenario/json-schema.ts';
import { exits } from '../exit.ts';

/** The JSON Schema of a scenario as text. */
export const schemaText = (): string => `${JSON.stringify(scenarioJsonSchema(), null, 2)}\n`;

/** `upsettle schema`: what editors complete and check scenarios by. It is printed whether quiet or not. */
export function schema(): number {
  process.stdout.write(schemaText());
  return exits.done;
}
