/** The schema file that lies beside scenarios. */
export const editorSchemaName = 'scenario.schema.json';

/** The line that tells an editor which schema a YAML file keeps to. */
export const modeline = (schema: string): string => `# yaml-language-server: $schema=./${schema}`;
