import { join, relative } from 'node:path';

/** The schema file that lies beside scenarios. */
export const editorSchemaName = 'scenario.schema.json';

/** The line that tells an editor which schema a YAML file keeps to. */
export const modeline = (schema: string): string => `# yaml-language-server: $schema=./${schema}`;

/** A scenario's text with that line, if it has one, pointing at the same schema from another folder. */
export const movedModeline = (text: string, from: string, to: string): string =>
  text.replace(/^(# yaml-language-server: \$schema=)\.\/(\S+)$/m, (_, start: string, schema: string) => {
    return start + relative(to, join(from, schema));
  });
