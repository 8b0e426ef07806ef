import { spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, statSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { escaped, page } from '../../src/report/page/page.ts';
import { pageSheet } from '../../src/report/page/sheets.ts';
import { keyFigures, tablesOf, words } from '../../src/report/page/tables.ts';
import { inRepo } from '../support/plants.ts';

const CHROMIUM = ['/usr/bin/chromium', '/usr/bin/chromium-browser', '/usr/bin/google-chrome'].find(
  existsSync,
);
const folder = mkdtempSync(join(tmpdir(), 'upsettle-page-'));
const made = join(folder, 'report.html');

function upsettle(...args: string[]): string {
  const r = spawnSync(process.execPath, [inRepo('dist/upsettle.js'), ...args], {
    encoding: 'utf8',
    cwd: inRepo('.'),
  });
  expect(r.status, r.stderr).toBe(0);
  return r.stdout;
}

beforeAll(() => {
  upsettle('run', 'scenarios/saltbush-loop.yaml', '--out', folder);
}, 60_000);

const hostile = '</script><b>"><img src=x onerror=alert(1)><!--';
const content = (more: object = {}) => ({
  verb: 'run',
  title: hostile,
  about: hostile,
  file: hostile,
  scenario: hostile,
  lines: [hostile],
  summary: {
    note: hostile,
    list: [
      { name: hostile, value_s: 3 },
      { name: 'b', value_s: 2 },
    ],
  },
  sheets: [
    pageSheet('outlets.png', {
      title: hostile,
      answer: [hostile],
      source: '',
      span: 3600,
      panels: [
        {
          title: 'copper',
          unit: 'g/L',
          weight: 1,
          from: 0,
          limits: [],
          lines: [
            {
              label: hostile,
              data: [
                { x: 0, y: 1 },
                { x: 3600, y: 2 },
              ],
            },
          ],
        },
      ],
      shades: [{ from: 0, to: 60, words: hostile }],
    }),
  ],
  frames: null,
  pictures: [],
  version: '0',
  ...more,
});

describe('the report page as text', () => {
  const html = (): string => readFileSync(made, 'utf8');

  it('is one file that fetches nothing and allows no script but its own', () => {
    const text = html();
    expect(statSync(made).size).toBeLessThan(1.5e6);
    const policy = /http-equiv="Content-Security-Policy" content="([^"]*)"/.exec(text)?.[1] ?? '';
    expect(policy).toContain("default-src 'none'");
    expect(policy).toMatch(/script-src 'sha256-[\w+/=]+'/);
    expect(policy).not.toContain('unsafe');
    expect(text).not.toMatch(/<(script|link|img|iframe)[^>]+(src|href)="(?!data:)/);
  });

  it('keeps a hostile title, stream or file a text', () => {
    const text = page(content(), 'window.ready = true;');
    const body = text.slice(text.indexOf('<body>'));
    expect(body).not.toContain('<b>');
    expect(body).not.toContain('<img src=x');
    expect(body.match(/<script/g)).toHaveLength(2);
    expect(body).toContain(escaped(hostile));
  });

  it('has the figures of summary.json, under words with their units', () => {
    expect(words('beyond_kg')).toBe('beyond [kg]');
    const summary = JSON.parse(readFileSync(join(folder, 'summary.json'), 'utf8')) as Record<string, unknown>;
    const text = html();
    for (const { key, value } of keyFigures(summary)) {
      expect(summary[key]).toBe(value);
      expect(text).toContain(`data-key="${key}" data-value="${escaped(String(value))}"`);
    }
    const tables = tablesOf(summary);
    expect(tables.map((t) => t.name)).toEqual(expect.arrayContaining(['limits', 'loops', 'final']));
    const limits = tables.find((t) => t.name === 'limits');
    expect(limits?.rows).toHaveLength((summary.limits as unknown[]).length);
  });

  it('says the answer first, the cautions, the methods and the scenario as it was run', () => {
    const text = html();
    for (const words of ['<h2>The answer</h2>', 'not a safety system', 'Steinebach', 'AIC-101'])
      expect(text).toContain(words);
    expect(text).toContain(escaped(readFileSync(inRepo('scenarios/saltbush-loop.yaml'), 'utf8')));
  });

  it('keeps the least and the greatest of a long line', () => {
    const data = Array.from({ length: 20_000 }, (_, k) => ({ x: k, y: k === 7777 ? 9 : Math.sin(k / 50) }));
    const sheet = {
      title: '',
      answer: [],
      source: '',
      span: 20_000,
      shades: [],
      panels: [{ title: '', unit: '', weight: 1, from: 0, limits: [], lines: [{ label: 'a', data }] }],
    };
    const [line] = pageSheet('a', sheet).panels[0].lines;
    expect(line.x.length).toBeLessThan(900);
    expect(Math.max(...line.y.map(Number))).toBe(9);
    expect(line.x[0]).toBe(0);
  });
});

describe.skipIf(CHROMIUM === undefined)('the report page in a browser', () => {
  let browser: Browser;
  const faults: string[] = [];
  const asked: string[] = [];

  beforeAll(async () => {
    const { chromium } = await import('playwright-core');
    browser = await chromium.launch({
      executablePath: CHROMIUM as string,
      args: ['--no-sandbox', '--disable-gpu', '--no-first-run', '--disable-background-networking'],
    });
  }, 60_000);
  afterAll(() => browser?.close());

  async function open(scheme: 'light' | 'dark' = 'light'): Promise<Page> {
    const p = await browser.newPage({ viewport: { width: 1200, height: 900 }, colorScheme: scheme });
    p.on('pageerror', (e) => faults.push(e.message));
    p.on('console', (m) => m.type() === 'error' && faults.push(m.text()));
    p.on('request', (r) => !r.url().startsWith('data:') && asked.push(r.url()));
    await p.goto(pathToFileURL(made).href);
    await p.locator('#charts figure canvas').first().waitFor();
    return p;
  }
  const charts = <T>(p: Page, read: string): Promise<T> =>
    p.evaluate(`(${read})(window.upsettle.charts())`) as Promise<T>;

  it('draws without a complaint and asks for nothing but itself', async () => {
    for (const scheme of ['light', 'dark'] as const) {
      asked.length = 0;
      const p = await open(scheme);
      expect(await charts<number>(p, '(list) => list.length')).toBeGreaterThan(5);
      expect(
        await charts<boolean>(p, '(list) => list.every((c) => c.width > 200 && c.data.datasets.length > 0)'),
      ).toBe(true);
      const text = await charts<string>(p, '(list) => list[0].options.scales.x.ticks.color');
      expect(text).toBe(scheme === 'dark' ? '#ececec' : '#1c1c1c');
      expect(asked).toHaveLength(1);
      await p.close();
    }
    expect(faults).toEqual([]);
  }, 60_000);

  it('moves profile and diagram together with the slider, by keys as well', async () => {
    const p = await open();
    const first =
      '(list) => list.filter((c) => ["profile", "diagram"].includes(c.canvas.dataset.kind)).slice(0, 2).map((c) => JSON.stringify(c.data.datasets.map((d) => d.data)))';
    const before = await charts<string[]>(p, first);
    const slider = p.locator('#moment');
    await slider.focus();
    await p.keyboard.press('Home');
    const after = await charts<string[]>(p, first);
    expect(after[0]).not.toBe(before[0]);
    expect(after[1]).not.toBe(before[1]);
    expect(await p.locator('#moment-time').textContent()).toBe('0 h');
    await p.close();
  }, 60_000);

  it('switches a series, takes a range, sorts a table, and has one behind each chart', async () => {
    const p = await open();
    await p.locator('.series input').first().uncheck();
    expect(await charts<boolean>(p, '(list) => list[0].isDatasetVisible(0)')).toBe(false);
    await p.locator('#from-0').fill('4');
    await p.locator('#to-0').fill('8');
    await p.locator('#to-0').press('Enter');
    expect(await charts<number[]>(p, '(list) => [list[0].scales.x.min, list[0].scales.x.max]')).toEqual([
      4, 8,
    ]);
    const head = p.locator('table.sortable thead button').nth(1);
    await head.focus();
    await p.keyboard.press('Enter');
    expect(await p.locator('table.sortable th[aria-sort=ascending]').count()).toBe(1);
    await p.locator('figure details summary').first().click();
    expect(await p.locator('figure').first().locator('details tbody tr').count()).toBeGreaterThan(50);
    await p.close();
  }, 60_000);

  it('prints on A4', async () => {
    const p = await open();
    const pdf = await p.pdf({ preferCSSPageSize: true });
    const pages = pdf.toString('latin1').match(/\/Type\s*\/Page\b/g)?.length ?? 0;
    expect(pages).toBeGreaterThan(2);
    expect(pages).toBeLessThan(25);
    await p.close();
    expect(faults).toEqual([]);
  }, 60_000);
});

if (CHROMIUM === undefined)
  process.stderr.write('No Chromium found: the report page is not tested in a browser.\n');
