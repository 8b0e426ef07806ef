import { createHash } from 'node:crypto';
import { cautions } from '../cautions.ts';
import { clock } from '../figures.ts';
import type { PageFrames } from './frames.ts';
import { methods } from './methods.ts';
import type { PageSheet } from './sheets.ts';
import { style } from './style.ts';
import { type Cell, keyFigures, tablesOf } from './tables.ts';

/** All that stands on a report page. */
export interface PageContent {
  readonly verb: string;
  readonly title: string;
  readonly about: string;
  /** The scenario file by its name, and its text as it was run. */
  readonly file: string;
  readonly scenario: string;
  /** The answer in words, as the screen says it. */
  readonly lines: readonly string[];
  readonly summary: object;
  readonly sheets: readonly PageSheet[];
  readonly frames: PageFrames | null;
  /** Pictures that are no charts over time. */
  readonly pictures: readonly { readonly name: string; readonly png: Buffer }[];
  readonly version: string;
}

/** Text that stays text, in an element or in an attribute. */
export const escaped = (s: string): string => s.replace(/[&<>"'`]/g, (c) => `&#${c.charCodeAt(0)};`);

/** JSON that cannot end the element in which it stands. */
const embedded = (v: unknown): string =>
  JSON.stringify(v)
    .replace(/</g, '\\u003c')
    .replace(/\u2028|\u2029/g, ' ');

const hash = (text: string): string => `'sha256-${createHash('sha256').update(text).digest('base64')}'`;

/**
 * One self-contained HTML page. Its policy allows the one script and the one style that it brings, by their hashes, and
 * pictures that it holds itself: nothing is fetched from anywhere.
 *
 * @param client the script of the page, as the build makes it.
 */
export function page(c: PageContent, client: string): string {
  const script = client.replace(/<\/(script)/gi, '<\\/$1').replace(/\n?\/\/# sourceMappingURL=.*$/m, '');
  const policy = [
    "default-src 'none'",
    `script-src ${hash(script)}`,
    `style-src ${hash(style)}`,
    'img-src data:',
    "base-uri 'none'",
    "form-action 'none'",
  ].join('; ');
  const data = embedded({ sheets: c.sheets, frames: c.frames });
  const tabled = tables(c.summary);
  return `<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="${policy}">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="color-scheme" content="light dark">
<title>${escaped(`${c.title}: ${c.verb}`)}</title>
<style>${style}</style>
</head>
<body>
<header>
<h1>${escaped(c.title)}</h1>
<p class="soft">upsettle ${escaped(c.verb)} ${escaped(c.file)}, version ${escaped(c.version)}${c.about === '' ? '' : `. ${escaped(c.about)}`}</p>
</header>
<main>
<h2>The answer</h2>
<pre class="answer">${escaped(c.lines.join('\n').trim())}</pre>
<h2>Key figures</h2>
${keys(c.summary)}
${c.sheets.length > 0 ? '<h2>Over time</h2>' : ''}
<div id="charts"></div>
${pictures(c, script.length + data.length + c.scenario.length + tabled.length)}
${tabled}
<h2>Cautions</h2>
<p class="caution">${escaped(cautions)}</p>
<h2>Methods</h2>
<ul>${(methods[c.verb] ?? []).map((m) => `<li>${escaped(m)}</li>`).join('')}</ul>
<h2>The scenario as it was run</h2>
<pre>${escaped(c.scenario)}</pre>
</main>
<script type="application/json" id="data">${data}</script>
<script>${script}</script>
</body>
</html>
`;
}

function keys(summary: object): string {
  const list = keyFigures(summary).map(
    ({ name, key, value }) =>
      `<div><dt>${escaped(name.replace(' [s]', ''))}</dt><dd data-key="${escaped(key)}" data-value="${escaped(rawCell(value))}">${key.endsWith('_s') && typeof value === 'number' ? escaped(clock(value)) : shownCell(value)}</dd></div>`,
  );
  return `<dl class="key">${list.join('')}</dl>`;
}

/** Characters of a page at most, about: pictures that do not fit stand beside the page alone. */
const LARGEST = 1_400_000;

function pictures({ pictures: list, title }: PageContent, taken: number): string {
  if (list.length === 0) return '';
  // Four characters hold three bytes.
  let left = (3 * (LARGEST - taken)) / 4;
  const figures = list.map(({ name, png }) => {
    if (png.length > left) return `<p>${escaped(name)} stands beside this page.</p>`;
    left -= png.length;
    const what = name.replace(/\.png$/, '').replaceAll('-', ' ');
    return `<figure><figcaption><h3>${escaped(what)}</h3></figcaption><img alt="${escaped(`${title}: ${what}; its figures stand in the tables of this page and in summary.json`)}" src="data:image/png;base64,${png.toString('base64')}"></figure>`;
  });
  return `<h2>Pictures</h2>${figures.join('\n')}`;
}

function tables(summary: object): string {
  const list = tablesOf(summary).map(({ name, head, rows }) => {
    const heads = head.map((h) => `<th scope="col">${escaped(h)}</th>`).join('');
    const body = rows
      .map(
        (r) =>
          `<tr>${r.map((v) => `<td data-value="${escaped(rawCell(v))}">${shownCell(v)}</td>`).join('')}</tr>`,
      )
      .join('');
    return `<div class="wide"><table class="sortable"><caption>${escaped(name)}</caption><thead><tr>${heads}</tr></thead><tbody>${body}</tbody></table></div>`;
  });
  return list.length === 0 ? '' : `<h2>Tables</h2>\n${list.join('\n')}`;
}

/** The figure as `summary.json` has it, for sorting. */
const rawCell = (v: Cell): string => (v === null ? '–' : String(v));

function shownCell(v: Cell): string {
  if (v === null) return '–';
  if (typeof v === 'boolean') return v ? 'yes' : 'no';
  if (typeof v === 'number') return String(Number(v.toPrecision(5)));
  return escaped(v);
}
