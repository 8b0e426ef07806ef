import type { LimitFigures } from '../study/rehearse/figures.ts';
import type { AnswerResult, RehearseResult } from '../study/rehearse/rehearse.ts';
import type { Kept } from '../study/rehearse/scan.ts';
import { shortCaution } from './cautions.ts';
import { clock, columns, figure, shown, withUnit } from './figures.ts';
import { outputText } from './loop-words.ts';
import { clockTime, hourOf, limitWords, movesWords, since, sizeWords, upsetWords } from './rehearse-words.ts';
import { startWords } from './screen.ts';

/** Answers, events and islands told on the screen; all of them stand in summary.json. */
const MOST_ROWS = 10;
const MOST_EVENTS = 4;
/** Relative change per hour above which the plant is not at rest. */
const AT_REST = 0.01;

/** First lines of `rehearse`: what one would say at the radio; then who can know, the ranking, and what binds. */
export function rehearseScreen(r: RehearseResult): string[] {
  const { nothing, chief, ground: g } = r;
  const main = nothing.limits[chief];
  const lines = [
    `REHEARSAL  ${headline(r)}; limit ${limitWords(main.limit, main.unit)}; from ${startWords(r.scenario)}`,
  ];
  const at = clockTime(r, g.first);
  if (at !== '') lines.push(`The upset begins at ${at}; times count from then.`);
  lines.push(...warnings(r), ...nothingLines(r), ...bestLines(r), ...knowledgeLines(r));
  if (r.answers.length > 0) lines.push(...rankLines(r));
  else lines.push('No answers are stated: see answers in README.');
  lines.push(...noteLines(r), ...unaidedLines(r), ...frequencyLines(r), shortCaution);
  return lines;
}

/** The first two upsets; the others stand in the summary. */
function headline(r: RehearseResult): string {
  const words = upsetWords(r);
  return words.length <= 2
    ? words.join('; ')
    : `${words.slice(0, 2).join('; ')} and ${words.length - 2} more`;
}

function warnings(r: RehearseResult): string[] {
  const { moving, startStated, first } = r.ground;
  const lines: string[] = [];
  if (moving.perHour > AT_REST)
    lines.push(
      `NOTE  the plant is not at rest as the upset begins: ${moving.path} still moves ${figure(100 * moving.perHour, 2)} %/h; let the upset begin later, or state start: steady.`,
    );
  lines.push(...loopLines(r));
  if (!startStated && first > 0) lines.push('The run starts steady, since the scenario states no start.');
  for (const c of r.clamped)
    lines.push(
      `NOTE  ${c.quantity} would fall below 0 after ${clock(c.time)} of the run: held at 0; make the change smaller.`,
    );
  if (r.stop.reason !== 'reached-end') lines.push('INCOMPLETE  the run with nothing done came to no end.');
  return lines;
}

/** How the loops stand, and what they did while nobody else did anything. */
function loopLines(r: RehearseResult): string[] {
  return r.nothing.loops.map((q, i) => {
    const { loop } = r.ground.joined.loops[i];
    if (q.automatic === 0) return `${q.name} in manual.`;
    const bound = [
      ...(q.atLimit > 0 ? [`at a limit for ${clock(q.atLimit)}`] : []),
      ...(q.slewing > 0 ? [`on its slew for ${clock(q.slewing)}`] : []),
    ];
    const manual = q.span - q.automatic > 1 ? ` for ${clock(q.automatic)}` : '';
    return `${q.name} in automatic${manual}, keeps ${loop.measure.of} at ${withUnit(loop.keepAt, 'kg/m^3')}; with nothing else done its output travels ${outputText(loop, q.travel)}${bound.length > 0 ? `, ${bound.join(', ')}` : ''}.`;
  });
}

/** A limit that was broken, from the break to the return. */
function brokenWords(r: RehearseResult, l: LimitFigures): string {
  const worst = `worst ${withUnit(l.worst.value, l.unit)} at ${since(r, l.worst.time)}`;
  if (l.overBefore) return `over already before the upset, ${worst}`;
  const which = l.breaks && r.ground.upsets.length > 1 ? `upset ${l.breaks.upset}` : 'the upset';
  const back = l.stillOver ? 'still over at the end' : `back at ${since(r, l.back ?? 0)}`;
  const clocked = l.breaks ? hourOf(r, l.breaks.time) : '';
  const when = clocked === '' ? '' : ` (${clocked})`;
  return `broken ${clock(l.breaks?.after ?? 0)} after ${which} begins${when}, ${worst}, ${back}`;
}

function nothingLines(r: RehearseResult): string[] {
  const { limits } = r.nothing;
  if (r.nothing.kept) {
    const main = limits[r.chief];
    return [
      `Nothing done: the limit is kept, worst ${withUnit(main.worst.value, main.unit)} at ${since(r, main.worst.time)}; no answer is needed.`,
    ];
  }
  return limits
    .filter((l) => !l.kept)
    .slice(0, 3)
    .flatMap((l) => {
      const name = limits.length > 1 ? ` ${limitWords(l.limit, l.unit)}` : '';
      const solute = l.limit.quantity;
      const parts = [
        `over for ${clock(l.outside)}${l.spells.length > 1 ? ` in ${l.spells.length} spells, the longest ${clock(l.longest)}` : ''}`,
        ...(l.beyond === null ? [] : [`${figure(l.beyond)} kg ${solute} above the limit`]),
        ...(l.more === null ? [] : [`${figure(l.more)} kg more lost than without the upset`]),
        ...(l.volume === null ? [] : [`${figure(l.volume)} m^3 out of spec`]),
        l.recovered === null
          ? 'not recovered by the end'
          : `recovered (within 2 %) at ${since(r, l.recovered)}`,
      ];
      return [
        `Nothing done:${name} ${brokenWords(r, l)};`,
        `  ${parts.slice(0, -2).join(', ')},`,
        `  ${parts.slice(-2).join(', ')}.`,
      ];
    });
}

function bestLines(r: RehearseResult): string[] {
  if (r.nothing.kept || r.answers.length === 0) return [];
  const good = r.answers.filter((a) => a.figures.kept);
  if (good.length === 0) {
    const late = r.answers.find((a) => a.latest !== null);
    if (late)
      return [
        `None helps as written; ${late.answer.name} would if begun within ${since(r, late.latest as number)}: too late, not too small.`,
      ];
    const sized = r.answers.find((a) => a.bounds?.sizes?.length);
    const first = r.answers[0];
    const once = first.worstAtOnce?.[r.chief];
    const main = r.nothing.limits[r.chief];
    const words =
      once === undefined ? '' : ` (${first.answer.name}: worst ${withUnit(once, main.unit)} even at once)`;
    return sized
      ? [
          `None helps as written: too small, not too late${words}; ${sized.answer.name} would at ${sizeWords(sized.answer, sized.bounds?.sizes?.[0].from ?? 1, r.plant)}.`,
        ]
      : [`None helps: neither an earlier start nor a larger size of any answer keeps the limit${words}.`];
  }
  return good.slice(0, 1).flatMap((a) => {
    const l = a.figures.limits[r.chief];
    const many = a.figures.limits.length > 1 ? 'all limits' : 'it';
    const end = a.bounds?.ends?.at(-1);
    const left =
      end === undefined || end.fromBracket === null ? '' : ` and not taken back before ${since(r, end.from)}`;
    const begun = a.latest === null ? '' : ` if begun within ${since(r, a.latest)}${left}`;
    return [
      `${a.answer.name} (${movesWords(a.answer)}) keeps ${many}: worst ${withUnit(l.worst.value, l.unit)},`,
      ` ${begun}.`,
    ];
  });
}

function knowledgeLines(r: RehearseResult): string[] {
  if (r.knowledge.length === 0) return [];
  const best = r.answers.find((a) => a.figures.kept && a.latest !== null);
  const rows = r.knowledge.map((k) => {
    const level = k.warn === null ? '' : ` (${figure(k.warn)})`;
    const name = `  ${k.instrument} ${k.quantity}${level}`;
    if (k.earliest === null) return [name, 'not within the run'];
    const span =
      k.latest === null
        ? `${clock(k.earliest - r.ground.first)} or not at all`
        : `${clock(k.earliest - r.ground.first)} to ${clock(k.latest - r.ground.first)}`;
    const alarms =
      k.falseAlarms > 0.01 ? `; ${figure(100 * k.falseAlarms, 2)} % of results warn without any upset` : '';
    if (!best) return [name, `by ${span}${alarms}`];
    const hand = (t: number): string => {
      const left = (best.latest as number) - t;
      return left >= 0 ? `${clock(left)} in hand` : `${clock(-left)} LATE`;
    };
    const worst = k.latest === null ? 'too late at worst' : `${hand(k.latest)} at worst`;
    return [name, `by ${span} -> ${hand(k.earliest)} at best, ${worst}${alarms}`];
  });
  const width = Math.max(...rows.map(([name]) => name.length));
  return [
    `Who can know in time?${best ? ` (for ${best.answer.name})` : ''}`,
    ...rows.map(([name, words]) => `${name.padEnd(width)}  ${words}`),
  ];
}

/** The first of several stretches is the answer; a star says that there are more. */
const star = (list: readonly Kept[] | null | undefined): string => (list && list.length > 1 ? '*' : '');

function rankLines(r: RehearseResult): string[] {
  const main = r.nothing.limits[r.chief];
  const { unit, factor } = shown(main.unit);
  const priced = r.nothing.cost !== null;
  const cells = (name: string, f: RehearseResult['nothing']): string[] => {
    const l = f.limits[r.chief];
    return [
      name,
      figure(l.worst.value * factor),
      f.outside > 0 ? clock(f.outside) : 'none',
      f.beyond > 0 ? `${figure(f.beyond)} kg` : '0',
    ];
  };
  const rows = r.answers
    .slice(0, MOST_ROWS)
    .map((a, i) => [
      `${i + 1}  ${a.answer.name}`,
      ...cells('', a.figures).slice(1),
      `${figure(a.figures.extraSolvent)} m^3`,
      ...(priced ? [figure(a.figures.cost ?? 0)] : []),
      a.latest === null ? 'none' : `${clock(a.latest - r.ground.first)}${star(a.bounds?.starts)}`,
      a.bounds?.sizes?.length
        ? `${sizeWords(a.answer, a.bounds.sizes[0].from, r.plant)}${star(a.bounds.sizes)}`
        : a.bounds?.sizes === null
          ? '-'
          : 'none',
      a.bounds?.ends?.length
        ? `${clock((a.bounds.ends.at(-1) as Kept).from - r.ground.first)}${star(a.bounds.ends)}`
        : '-',
      bindWords(a, r),
    ]);
  const last = ['-', ...(priced ? [figure(r.nothing.cost ?? 0)] : []), '-', '-', '-', '-'];
  const currency = r.scenario.commissioning?.prices?.currency ?? '';
  return columns(
    [
      [
        'rank answer',
        `worst ${unit}`,
        'over',
        'above',
        'extra organic',
        ...(priced ? [currency] : []),
        'latest start',
        'least size',
        'safe end',
        'binds',
      ],
      ...rows,
      [...cells('   nothing', r.nothing), ...last],
    ],
    '',
  );
}

function bindWords(a: AnswerResult, r: RehearseResult): string {
  if (r.nothing.kept) return '-';
  return {
    lateness: 'lateness',
    'too late': 'too late',
    size: 'size',
    neither: 'neither',
    'never begun': 'never begun',
  }[a.binds];
}

function noteLines(r: RehearseResult): string[] {
  const lines: string[] = [];
  const span = (q: Kept): string => `${clock(q.from - r.ground.first)} to ${clock(q.to - r.ground.first)}`;
  for (const a of r.answers.slice(0, MOST_ROWS)) {
    const { name } = a.answer;
    if (a.bounds && a.bounds.starts.length > 1)
      lines.push(`* ${name}: kept when begun ${a.bounds.starts.map(span).join(', and again ')}`);
    if (a.bounds?.ends && a.bounds.ends.length > 1)
      lines.push(`* ${name}: kept when taken back ${a.bounds.ends.map(span).join(', and again ')}`);
    const sizes = a.bounds?.sizes;
    if (sizes?.length && sizes[0].toBracket !== null)
      lines.push(
        `* ${name}: above ${sizeWords(a.answer, sizes[0].to, r.plant)} ${a.bounds?.above ?? 'a limit is broken'}`,
      );
    if (a.added.length > 0)
      lines.push(
        `! ${name}: ${a.added
          .slice(0, 2)
          .map((e) => `${clock(e.time - r.ground.first)} ${e.message}`)
          .join('; ')}`,
      );
    if (a.binds === 'never begun') lines.push(`! ${name}: its condition is never met`);
    else if (a.answer.steps.some((s) => 'when' in s.begins) || a.answer.steps.length > 1)
      lines.push(
        `  ${name}: ${a.answer.steps
          .map((s, k) => {
            const t = a.plan.starts[k];
            return `${s.name === name ? 'begun' : s.name} ${t === null ? 'not at all' : `at ${since(r, t)}`}`;
          })
          .join(', ')}`,
      );
  }
  const events = r.nothing.events.slice(0, MOST_EVENTS);
  if (events.length > 0)
    lines.push(
      'With nothing done:',
      ...events.map((e) => `  ${clock(e.time - r.ground.first)}  ${e.message}`),
      ...(r.nothing.events.length > MOST_EVENTS
        ? [`  … and ${r.nothing.events.length - MOST_EVENTS} more in summary.json`]
        : []),
    );
  return lines;
}

function unaidedLines(r: RehearseResult): string[] {
  const { sizes, durations } = r.unaided;
  const broken = !r.nothing.kept;
  const size = sizes?.find((q) => q.from === 0);
  const long = durations.find((q) => q.from === 0);
  const parts = [
    ...(size === undefined
      ? []
      : size.toBracket === null
        ? [`at least ${figure(100 * size.to)} % of the upset's size`]
        : [`${figure(100 * size.to)} % of the upset's size`]),
    ...(long === undefined
      ? []
      : long.toBracket === null
        ? [broken ? '' : `the upset as it is for ${clock(long.to * r.duration)} or more`]
        : [`the upset as it is for ${clock(long.to * r.duration)}`]),
  ].filter((p) => p !== '');
  if (parts.length === 0) return sizes === null ? [] : ['Unaided the plant absorbs no part of the upset.'];
  return [`Unaided the plant absorbs ${parts.join(', or ')}.`];
}

function frequencyLines(r: RehearseResult): string[] {
  const f = r.frequency;
  if (f === null) return [];
  const held = r.nothing.loops.some((q) => q.automatic > 0) ? ', loops held' : '';
  const reach =
    f.swing === 0
      ? ''
      : f.reaches === null
        ? `; swings as large as the upset reach the limit at no period (linear${held})`
        : `; swings as large as the upset reach the limit where they take longer than ${clock(f.reaches)} (linear${held})`;
  return [
    `Swings of ${f.input}: of a lasting change ${figure((f.lasting * shown(f.outputUnit).factor) / shown(f.inputUnit).factor)} ${shown(f.outputUnit).unit} per ${shown(f.inputUnit).unit} gets through, half of that at a period of ${f.half === null ? 'more than 10 d' : clock(f.half)}${reach}.`,
  ];
}
