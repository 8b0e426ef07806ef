import { existsSync, readFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import type { PageFrames } from '../report/page/frames.ts';
import type { Drawn } from '../report/pictures/index.ts';
import type { Scenario } from '../scenario/scenario.ts';
import { version, write } from './files.ts';

/** What a verb knows of its page beside its pictures. */
export interface PageOf {
  readonly verb: string;
  readonly file: string;
  readonly scenario: Pick<Scenario, 'title' | 'about'>;
  readonly lines: readonly string[];
  readonly summary: object;
  readonly frames?: PageFrames | null;
}

const NAME = 'report.html';

/** Writes the report page beside what was drawn. Returns the names of all files. */
export async function writePage(folder: string, of: PageOf, drawn: readonly Drawn[]): Promise<string[]> {
  const { page } = await import('../report/page/page.ts');
  const { pageSheet } = await import('../report/page/sheets.ts');
  const content = {
    verb: of.verb,
    title: of.scenario.title,
    about: of.scenario.about ?? '',
    file: of.file,
    scenario: readFileSync(of.file, 'utf8'),
    lines: of.lines,
    summary: of.summary,
    sheets: drawn.flatMap((d) => (d.sheet ? [pageSheet(d.name, d.sheet)] : [])),
    frames: of.frames ?? null,
    pictures: drawn.filter((d) => !d.sheet),
    version: version(),
  };
  write(folder, NAME, page(content, client()));
  return [...drawn.map((d) => d.name), NAME];
}

/** The script of the page as the build makes it, beside the command or in `dist` of a folder above. */
function client(): string {
  for (let folder = import.meta.dirname; folder !== dirname(folder); folder = dirname(folder))
    for (const path of [join(folder, 'page-client.js'), join(folder, 'dist', 'page-client.js')])
      if (existsSync(path)) return readFileSync(path, 'utf8');
  throw new Error('page-client.js is not built; run npm run build');
}
