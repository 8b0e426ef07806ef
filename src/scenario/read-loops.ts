import { readAnalyser } from './analyser.ts';
import { type Basis, carrierFlow, concentration, contentKinds } from './content.ts';
import { isLoopChange, loopsUnder } from './loop-changes.ts';
import { checkOwner, Ownership } from './loop-ownership.ts';
import type { Loop, Move, RawLoop } from './loops.ts';
import { hint } from './nearest.ts';
import type { Outline, Target } from './outline.ts';
import type { Problem } from './refusal.ts';
import type { Path, Scenario } from './scenario.ts';
import type { RawScenario } from './schema.ts';
import { show } from './show.ts';
import { type Kind, quantity } from './units.ts';

/** Seed of the noise of an analyser that states none. */
const USUAL_SEED = 1;
/** A scan is followed as the straight line through its steps: it must be short beside the analyser's interval. */
const SLOWEST_SCAN = 0.1;

export interface LoopSurroundings {
  readonly outline: Outline;
  readonly basis: Basis;
}

/**
 * The scenario with its loops; changes of set points, modes and outputs go from the upsets to the loops that they are
 * about. Complains in place.
 */
export function withLoops(
  raw: RawScenario,
  s: Scenario,
  around: LoopSurroundings,
  problems: Problem[],
): Scenario {
  const entries = Object.entries(raw.loops ?? {});
  if (entries.length === 0) {
    for (const [i, u] of (raw.upsets ?? []).entries())
      if (u.put !== undefined)
        problems.push({
          path: ['upsets', i, 'put'],
          message: 'there is no loop to be put anywhere; take it out',
        });
    return s;
  }
  const read = entries.flatMap(([name, l]) => new LoopReader(name, l, around, problems).read() ?? []);
  const loops = loopsUnder(read, s.upsets);
  new Ownership(s, loops, problems).check();
  for (const [i, u] of (raw.upsets ?? []).entries()) checkOwner(u, ['upsets', i], loops, problems);
  const names = entries.map(([name]) => ({ name }));
  return { ...s, upsets: s.upsets.filter((c) => !isLoopChange(names, c)), loops };
}

class LoopReader {
  readonly #name: string;
  readonly #raw: RawLoop;
  readonly #around: LoopSurroundings;
  readonly #problems: Problem[];

  constructor(name: string, raw: RawLoop, around: LoopSurroundings, problems: Problem[]) {
    this.#name = name;
    this.#raw = raw;
    this.#around = around;
    this.#problems = problems;
  }

  #complain(message: string, ...at: string[]): null {
    this.#problems.push({ path: ['loops', this.#name, ...at], message });
    return null;
  }

  read(): Loop | null {
    const { measure, controller: c } = this.#raw;
    const target = this.#measured(measure.of, 'measure', 'of');
    const move = this.#move();
    if (!target || !move) return null;
    const content = (text: string | number, ...at: string[]): number => this.#content(text, target, at);
    const keepAt = content(this.#raw.keep_at, 'keep_at');
    const gain = this.#gain(c.gain, move.kind, target, 'controller', 'gain');
    const scan = this.#scan(measure.analyser.every.value);
    const derivativeTime = c.derivative_time?.value ?? 0;
    const filter = c.filter?.value ?? 0;
    if (scan !== null && derivativeTime + filter > 0)
      this.#complain(
        'derivative_time and filter act between results; they need runs: on each result',
        'controller',
        'runs',
      );
    return {
      name: this.#name,
      measure: {
        of: measure.of,
        analyser: this.#analyser(measure.analyser, target, 'measure', 'analyser'),
        range: this.#range(content),
        seed: measure.seed ?? USUAL_SEED,
      },
      move,
      keepAt,
      controller: {
        action: c.action,
        gain,
        integralTime: c.integral_time.value,
        derivativeTime,
        filter,
        setPointWeight: c.set_point_weight?.value ?? 1,
        scan,
        auto: (c.mode ?? 'auto') === 'auto',
      },
      feedforward: this.#feedforward(move.kind),
      changes: [],
    };
  }

  /** A concentration in a stream, or null with a complaint. */
  #measured(of: string, ...at: string[]): (Target & { component: string }) | null {
    const { outline } = this.#around;
    const t = outline.limitable.get(of);
    if (t?.what === 'content' && t.component !== undefined) return { ...t, component: t.component };
    if (!outline.whole || !outline.named) return null;
    const known = [...outline.limitable].filter(([, q]) => q.what === 'content').map(([k]) => k);
    return this.#complain(
      t
        ? `a loop measures a concentration, ${show(of)} is none; name one such as raffinate.copper, by your names`
        : `unknown quantity ${show(of)}${hint(of, known)}`,
      ...at,
    );
  }

  #content(text: string | number, target: Target & { component: string }, at: readonly string[]): number {
    const q = quantity(text, ...contentKinds.filter((k) => k !== 'a mass fraction'));
    if ('wrong' in q) {
      this.#complain(q.wrong, ...at);
      return Number.NaN;
    }
    if (q.value < 0) this.#complain(`must not be negative, got ${show(text)}`, ...at);
    const path: Path = ['loops', this.#name, ...at];
    return concentration(q, target.component, target.phase, this.#around.basis, path, this.#problems);
  }

  #analyser(raw: RawLoop['measure']['analyser'], t: Target & { component: string }, ...at: string[]) {
    const path = ['loops', this.#name, ...at];
    return readAnalyser(raw, t.component, t.phase, this.#around.basis, path, this.#problems);
  }

  #range(content: (text: string, ...at: string[]) => number): readonly [number, number] | null {
    const { range } = this.#raw.measure;
    if (range === undefined) return null;
    const parts = /^(.+?)\s+to\s+(.+)$/.exec(range.trim());
    if (!parts)
      return this.#complain(`expected a range such as '0 to 2 g/L', got ${show(range)}`, 'measure', 'range');
    const unit = /^[+\d.eE-]+\s*(.*)$/.exec(parts[2])?.[1] ?? '';
    const low = /^[+\d.eE-]+$/.test(parts[1]) ? `${parts[1]} ${unit}` : parts[1];
    const pair = [content(low, 'measure', 'range'), content(parts[2], 'measure', 'range')] as const;
    if (pair[0] >= pair[1])
      this.#complain(`begins where it ends or above it: ${show(range)}`, 'measure', 'range');
    return pair;
  }

  #move(): Move | null {
    const { move } = this.#raw;
    const given = (['ratio', 'flow', 'set_point'] as const).filter((k) => move[k] !== undefined);
    if (given.length !== 1)
      return this.#complain(
        `expected exactly one of ratio, flow, set_point; got ${given.join(' and ') || 'none'}`,
        'move',
      );
    const [key] = given;
    const text = move[key] as string;
    const kind = key === 'set_point' ? 'set point' : key;
    const parts = text.split(' / ').map((p) => p.trim());
    if (kind === 'ratio' && parts.length !== 2)
      return this.#complain(`expected 'one flow / another', got ${show(text)}`, 'move', 'ratio');
    const inner = kind === 'set point' ? this.#innerTarget(text) : null;
    const flows = kind === 'set point' ? [] : kind === 'ratio' ? parts : [text];
    const known = flows.map((f) => this.#flow(f, key));
    if (known.includes(false) || (kind === 'set point' && inner === null)) return null;
    if (flows.length === 2 && flows[0] === flows[1])
      return this.#complain('a flow over itself; name two flows', 'move', 'ratio');
    for (const bound of ['low', 'high'] as const)
      if (move[bound] === undefined)
        this.#complain(
          `needs ${bound}: an output without limits drives flows below zero and beyond all measure`,
          'move',
        );
    const low = move.low === undefined ? Number.NaN : this.#figure(move.low, kind, inner, 'move', 'low');
    const high = move.high === undefined ? Number.NaN : this.#figure(move.high, kind, inner, 'move', 'high');
    if (low < 0) this.#complain(`must not be negative, got ${show(move.low)}`, 'move', 'low');
    if (low >= high)
      this.#complain(
        `low ${show(move.low)} is not below high ${show(move.high)}; exchange them or widen the range`,
        'move',
      );
    if (kind === 'set point')
      for (const k of ['flow_lag', 'flow_filter'] as const)
        if (move[k]) this.#complain('belongs to the loop that moves the flow; state it there', 'move', k);
    const [flowLow, flowHigh] = this.#flowLimits(kind);
    const up = typeof move.slew === 'object' ? move.slew.up : move.slew;
    const down = typeof move.slew === 'object' ? move.slew.down : move.slew;
    return {
      kind,
      quantity: kind === 'ratio' ? parts[0] : text,
      over: kind === 'ratio' ? parts[1] : null,
      low,
      high,
      flowLow,
      flowHigh,
      slewUp: this.#slew(up, kind, inner),
      slewDown: this.#slew(down, kind, inner),
      flowLag: move.flow_lag?.value ?? 0,
      flowFilter: move.flow_filter?.value ?? 0,
    };
  }

  /** Least and most of the flow that a ratio sets. */
  #flowLimits(kind: Move['kind']): readonly [number, number] {
    const { move } = this.#raw;
    const stated = (key: 'flow_low' | 'flow_high', without: number): number => {
      const text = move[key];
      if (text === undefined) return without;
      if (kind !== 'ratio') {
        const instead = kind === 'flow' ? 'low and high are limits of the flow already' : 'it moves no flow';
        this.#complain(`belongs to a ratio; ${instead}`, 'move', key);
        return without;
      }
      const value = this.#figure(text, 'flow', null, 'move', key);
      if (value < 0) this.#complain(`must not be negative, got ${show(text)}`, 'move', key);
      return value;
    };
    const [low, high] = [stated('flow_low', 0), stated('flow_high', Infinity)];
    if (low >= high)
      this.#complain(
        `flow_low ${show(move.flow_low)} is not below flow_high ${show(move.flow_high)}`,
        'move',
      );
    return [low, high];
  }

  #innerTarget(name: string): (Target & { component: string }) | null {
    const { outline } = this.#around;
    const t = outline.changeable.get(`${name}.set point`);
    if (t?.component !== undefined && name !== this.#name) return { ...t, component: t.component };
    const loops = [...outline.changeable.keys()].flatMap((k) =>
      k.endsWith('.mode') ? [k.slice(0, -5)] : [],
    );
    const others = loops.filter((n) => n !== this.#name);
    return this.#complain(`no other loop is called ${show(name)}${hint(name, others)}`, 'move', 'set_point');
  }

  #flow(path: string, key: string): boolean {
    const { outline } = this.#around;
    const t = outline.changeable.get(path);
    if (t?.what === 'flow' && path.endsWith('.flow')) return true;
    if (!outline.whole || !outline.named) return false;
    const flows = [...outline.changeable].filter(([k, q]) => q.what === 'flow' && k.endsWith('.flow'));
    const known = flows.map(([k]) => k);
    const message = outline.limitable.has(path)
      ? `${show(path)} is a result; a loop moves the flow of a feed or a tank: ${known.join(', ')}`
      : `unknown flow ${show(path)}${hint(path, known)}`;
    this.#complain(message, 'move', key);
    return false;
  }

  /** A figure of the output. */
  #figure(
    text: string | number,
    kind: Move['kind'],
    inner: (Target & { component: string }) | null,
    ...at: string[]
  ): number {
    if (kind === 'set point' && inner) return this.#content(text, inner, at);
    const kinds: Kind[] = kind === 'ratio' ? ['a plain number'] : ['a flow by volume', 'a flow by mass'];
    const q = quantity(text, ...kinds);
    if ('wrong' in q) {
      this.#complain(q.wrong, ...at);
      return Number.NaN;
    }
    if (q.kind !== 'a flow by mass') return q.value;
    const path = ['loops', this.#name, ...at];
    return carrierFlow(q, 'organic', [], this.#around.basis, path, this.#problems);
  }

  #slew(
    text: string | undefined,
    kind: Move['kind'],
    inner: (Target & { component: string }) | null,
  ): number {
    if (text === undefined) return Infinity;
    const parts = /^(.+)\s+per\s+(\S+)$/.exec(text.trim());
    const per = parts ? quantity(`1 ${parts[2]}`, 'a time') : { wrong: '' };
    if (!parts || 'wrong' in per) {
      this.#complain(`expected a rate such as '0.01 per min', got ${show(text)}`, 'move', 'slew');
      return Infinity;
    }
    const value = this.#figure(parts[1], kind, inner, 'move', 'slew') / per.value;
    if (value <= 0) this.#complain(`must be greater than 0, got ${show(text)}`, 'move', 'slew');
    return value;
  }

  /** Output per unit of what is measured. */
  #gain(
    text: string | number,
    kind: Move['kind'],
    target: Target & { component: string },
    ...at: string[]
  ): number {
    const parts = /^(.+?)\s+per\s+(.+)$/.exec(String(text).trim());
    const example = { ratio: '0.4 per g/L', flow: '80 m^3/h per g/L', 'set point': '0.5 g/L per g/L' }[kind];
    if (!parts) {
      this.#complain(`expected a gain such as '${example}', got ${show(text)}`, ...at);
      return Number.NaN;
    }
    const inner = kind === 'set point' ? this.#innerTarget(this.#raw.move.set_point as string) : null;
    const value = this.#figure(parts[1], kind, inner, ...at) / this.#content(`1 ${parts[2]}`, target, at);
    if (value < 0)
      this.#complain(
        `a gain is not negative; its sense is stated by action: direct or reverse, got ${show(text)}`,
        ...at,
      );
    return value;
  }

  #scan(every: number): number | null {
    const { runs = 'on each result' } = this.#raw.controller;
    if (runs.trim() === 'on each result') return null;
    const text = /^every\s+(.+)$/.exec(runs.trim())?.[1];
    const q = text === undefined ? { wrong: '' } : quantity(text, 'a time');
    if ('wrong' in q || q.value <= 0)
      return this.#complain(
        `expected 'on each result' or a scan such as 'every 1 s', got ${show(runs)}`,
        'controller',
        'runs',
      );
    if (q.value > SLOWEST_SCAN * every)
      return this.#complain(
        `a scan of ${text} is not short beside the analyser's interval (a tenth at most); run it on each result`,
        'controller',
        'runs',
      );
    return q.value;
  }

  #feedforward(kind: Move['kind']): Loop['feedforward'] {
    const f = this.#raw.feedforward;
    if (f === undefined) return null;
    const target = this.#measured(f.from, 'feedforward', 'from');
    if (!target) return null;
    const form = f.form ?? 'add';
    if (form === 'add' && f.gain === undefined)
      this.#complain("needs its gain, such as '0.3 per g/L', or form: multiply", 'feedforward');
    if (form === 'multiply' && f.gain !== undefined)
      this.#complain(
        'multiplies the output by the change of what it measures; it has no gain; take it out',
        'feedforward',
        'gain',
      );
    return {
      from: f.from,
      analyser: this.#analyser(f.analyser, target, 'feedforward', 'analyser'),
      seed: f.seed ?? USUAL_SEED + 1,
      gain: form === 'add' && f.gain !== undefined ? this.#signed(f.gain, kind, target) : 0,
      lead: f.lead?.value ?? 0,
      lag: f.lag?.value ?? 0,
      form,
    };
  }

  /** A feedforward gain may have either sign. */
  #signed(text: string | number, kind: Move['kind'], target: Target & { component: string }): number {
    const t = String(text).trim();
    const value = this.#gain(t.replace(/^-\s*/, ''), kind, target, 'feedforward', 'gain');
    return t.startsWith('-') ? -value : value;
  }
}
