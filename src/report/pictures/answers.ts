import type { ChartConfiguration } from 'chart.js';
import type { RehearseResult } from '../../study/rehearse/rehearse.ts';
import type { ShownLine } from '../../study/rehearse/shown.ts';
import { clock, shown, withUnit } from '../figures.ts';
import { limitWords, upsetWords } from '../rehearse-words.ts';
import { startWords } from '../screen.ts';
import { type Panel, panelSheet } from './panels.ts';
import type { Picture } from './picture.ts';
import type { Rehearsed } from './start-size.ts';
import { legend, short } from './style.ts';

/** Answers drawn, the best first; more lines could not be told apart. */
const MOST_ANSWERS = 5;
const MOST_LIMITS = 2;
const MOST_INPUTS = 3;
const MOST_LEVELS = 3;
/** Flows set by loops, out of the panels for inputs. */
const MOST_MOVED = 2;
const NOTHING = 'nothing done';

/** The limited quantities in every run over the one in which nothing is done, and what was changed below. */
export const answers: Picture<Rehearsed> = {
  name: () => 'answers.png',
  config({ result: r }) {
    const limited = [...new Set(r.nothing.limits.map((l) => l.path))].slice(0, MOST_LIMITS);
    const moved = [...new Set(r.shown.moved.map((l) => l.path))].slice(0, MOST_MOVED);
    const panels = [
      ...limited.map((path) => limitPanel(r, path)),
      ...moved.map((path) => panel(r, path, r.shown.moved, 1)),
      ...inputPanels(r).slice(0, MOST_INPUTS - moved.length),
    ];
    return sheet(r, 'every answer over the upset', verdicts(r), panels, panels[0].lines.length);
  },
};

/** Levels, interfaces, bands and tanks in every run, where they move. */
export const answerLevels: Picture<Rehearsed> = {
  name: () => 'levels.png',
  parts: ({ result: r }) => (r.shown.levels.length > 0 ? [{ train: '', solute: '' }] : []),
  config({ result: r }) {
    const paths = mixed([...new Set(r.shown.levels.map((l) => l.path))]).slice(0, MOST_LEVELS);
    const panels = paths.map((path) => panel(r, path, r.shown.levels, 1));
    const events = r.nothing.events
      .slice(0, 2)
      .map((e) => `With nothing done, ${clock(e.time - r.ground.first)}: ${e.message}`);
    const tanks = r.nothing.tanks
      .slice(0, 3)
      .map((t) => `${t.tank} ${withUnit(t.least, 'm^3')} to ${withUnit(t.most, 'm^3')}`)
      .join(', ');
    const answer =
      events.length > 0 ? events : [`No event with nothing done${tanks === '' ? '' : `; ${tanks}`}.`];
    return sheet(r, 'levels', answer, panels, panels[0].lines.length);
  },
};

/** One of each kind (tank, interface, band) in turn. */
function mixed(paths: readonly string[]): string[] {
  const kinds = ['.volume', '.interface', '.band'].map((k) => paths.filter((p) => p.endsWith(k)));
  return kinds
    .flatMap((own, k) => own.map((path, i) => ({ path, at: i * kinds.length + k })))
    .sort((a, b) => a.at - b.at)
    .map((q) => q.path);
}

function sheet(
  r: RehearseResult,
  what: string,
  answer: readonly string[],
  panels: readonly Panel[],
  listed: number,
): ChartConfiguration {
  const { first, horizon, before } = r.ground;
  const config = panelSheet({
    title: `${short(r.scenario.title, 60)}: ${what}`,
    answer: answer.map((l) => short(l, 150)),
    source: `${short(r.scenario.title, 50)}: ${short(upsetWords(r).join('; '), 80)}; start ${startWords(r.scenario)}`,
    span: horizon - first,
    begin: before.time - first,
    axis: 'time since the upset began',
    panels,
    shades: r.shades.map((q) => ({ ...q, from: q.from - first, to: q.to - first })),
  });
  // The same answer has the same line in all panels: it is listed once.
  if (config.options?.plugins) config.options.plugins.legend = legend((i) => i < listed);
  return config;
}

function verdicts(r: RehearseResult): string[] {
  const main = r.nothing.limits[r.chief];
  const best = r.answers.find((a) => a.figures.kept);
  const nothing = r.nothing.kept
    ? `Nothing done keeps ${limitWords(main.limit, main.unit)}: worst ${withUnit(main.worst.value, main.unit)}`
    : `Nothing done: ${limitWords(main.limit, main.unit)} broken for ${clock(main.outside)}, worst ${withUnit(main.worst.value, main.unit)} at ${clock(main.worst.time - r.ground.first)}`;
  if (r.answers.length === 0 || r.nothing.kept) return [nothing];
  if (!best) return [nothing, 'No answer keeps the limits as written.'];
  const latest = best.latest === null ? '' : `, if begun within ${clock(best.latest - r.ground.first)}`;
  return [
    nothing,
    `Best: ${best.answer.name} keeps it, worst ${withUnit(best.figures.limits[r.chief].worst.value, main.unit)}${latest}`,
  ];
}

/** Nothing done first, then the answers by rank; each keeps its style in all panels. */
function panel(r: RehearseResult, path: string, list: readonly ShownLine[], weight: number): Panel {
  const { unit, factor } = shown(r.plant.system.outputs.find((o) => o.path === path)?.unit ?? '');
  const names = [null, ...r.answers.slice(0, MOST_ANSWERS).map((a) => a.answer.name)];
  const { times } = r.shown;
  return {
    title: path.slice(path.lastIndexOf('.') + 1),
    heading: short(path, 60),
    unit,
    weight,
    lines: names.flatMap((name, i) => {
      const line = list.find((l) => l.path === path && l.answer === name);
      if (!line) return [];
      const data = times.map((t, k) => ({ x: t - r.ground.first, y: line.values[k] * factor }));
      return [{ label: name ?? NOTHING, data, style: styleOf(i) }];
    }),
    limits: [],
    from: r.ground.before.time - r.ground.first,
  };
}

/** Black for doing nothing; the palette has its black last. */
const styleOf = (i: number): number => (i === 0 ? 6 : i - 1);

function limitPanel(r: RehearseResult, path: string): Panel {
  const own = r.nothing.limits.filter((l) => l.path === path);
  return {
    ...panel(r, path, r.shown.limited, 3),
    title: path.includes(' / ') ? 'ratio' : path.slice(path.lastIndexOf('.') + 1),
    limits: own.map((l) => ({
      value: l.limit.value * shown(l.unit).factor,
      label: `limit ${l.limit.side === 'below' ? '<' : '>'} ${withUnit(l.limit.value, l.unit)}`,
      // Time runs from the upset on.
      from: Math.max(0, l.limit.from - r.ground.first),
    })),
  };
}

/** What upsets and answers change, each quantity in a panel of its own. */
function inputPanels(r: RehearseResult): Panel[] {
  const runs = r.shown.inputs.slice(0, 1 + MOST_ANSWERS);
  const quantities = [
    ...new Set(runs.flatMap((q) => q.courses.filter((c) => c.unit !== '').map((c) => c.quantity))),
  ];
  const { first, horizon, before } = r.ground;
  // The first upset, then what answers move, then the other upsets.
  const moved = new Set(r.answers.flatMap((a) => a.plan.moves.map((m) => m.quantity)));
  const rank = (q: string): number => (q === quantities[0] ? 0 : moved.has(q) ? 1 : 2);
  const order = [...quantities].sort((a, b) => rank(a) - rank(b));
  return order.slice(0, MOST_INPUTS).map((quantity): Panel => {
    const input = r.plant.system.inputs.findIndex((i) => i.path === quantity);
    const { unit, factor } = shown(r.plant.system.inputs[input].unit);
    const flat = [before.time, horizon].map((t) => ({ x: t - first, y: r.plant.inputs[input] * factor }));
    return {
      title: quantity.slice(quantity.lastIndexOf('.') + 1),
      heading: short(quantity, 60),
      unit,
      weight: 1,
      lines: runs.map((q, i) => {
        const c = q.courses.find((k) => k.quantity === quantity);
        const data = c ? c.times.map((t, k) => ({ x: t - first, y: c.values[k] * factor })) : flat;
        return { label: quantity, data, style: styleOf(i) };
      }),
      limits: [],
      from: before.time - first,
    };
  });
}
