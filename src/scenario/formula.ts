import { guess } from './nearest.ts';
import type { Formula } from './scenario.ts';
import { show } from './show.ts';
import { parseExpression } from './units.ts';

/** What a formula may call; everything else is refused, so that a file from a stranger can do no harm. */
export const FUNCTIONS = ['exp', 'log', 'ln', 'log10', 'sqrt', 'abs', 'min', 'max', 'tanh'] as const;
const OPERATORS = ['+', '-', '*', '/', '^'];
/** Characters in a formula and nested levels in its tree: far above any isotherm, far below any trouble. */
const LONGEST = 500;
const DEEPEST = 60;

export type ParsedFormula =
  | { readonly formula: Formula; readonly names: readonly string[] }
  | { readonly wrong: string; readonly unknown?: string };

/** The parts of a syntax tree that are looked at. */
interface Node {
  readonly type: string;
  readonly value?: unknown;
  readonly name?: string;
  readonly op?: string;
  readonly implicit?: boolean;
  readonly args?: readonly Node[];
  readonly content?: Node;
  readonly fn?: Node;
}

/**
 * A user's expression as plain data: numbers, declared names, arithmetic and elementary functions. Nothing of the
 * parser's own language (assignments, units, indexing, calls of its library) gets through.
 */
export function parseFormula(text: unknown, names: readonly string[]): ParsedFormula {
  if (typeof text === 'number' && Number.isFinite(text))
    return { formula: { kind: 'number', value: text }, names: [] };
  if (typeof text !== 'string' || text.trim() === '')
    return { wrong: `expected a formula such as '18*c_a/(1 + 0.9*c_a)', got ${show(text)}` };
  if (text.length > LONGEST)
    return { wrong: `a formula may have ${LONGEST} characters, this has ${text.length}; shorten it` };
  const translator = new Translator(names);
  try {
    const formula = translator.translate(parseExpression(text) as Node);
    return { formula, names: [...translator.used] };
  } catch (e) {
    if (e instanceof NotAllowed) return { wrong: e.message, unknown: e.unknown };
    const at = (e as { char?: number }).char;
    return {
      wrong: `not a formula${at === undefined ? '' : ` (at character ${at})`}: ${show(text)}; write one such as 18*c_a/(1 + 0.9*c_a)`,
    };
  }
}

class NotAllowed extends Error {
  readonly unknown: string | undefined;

  constructor(message: string, unknown?: string) {
    super(message);
    this.unknown = unknown;
  }
}

class Translator {
  readonly used = new Set<string>();
  readonly #names: readonly string[];

  constructor(names: readonly string[]) {
    this.#names = names;
  }

  translate(n: Node, depth = 0): Formula {
    if (depth > DEEPEST)
      throw new NotAllowed(`the formula is nested too deeply (more than ${DEEPEST} levels)`);
    const inner = (a: Node): Formula => this.translate(a, depth + 1);
    switch (n.type) {
      case 'ConstantNode':
        if (typeof n.value !== 'number') break;
        if (!Number.isFinite(n.value)) throw new NotAllowed('a number of the formula is not finite');
        return { kind: 'number', value: n.value };
      case 'ParenthesisNode':
        return inner(n.content as Node);
      case 'SymbolNode':
        return this.#name(n.name as string);
      case 'OperatorNode':
        if (n.implicit) throw new NotAllowed('write a multiplication with *');
        if (!OPERATORS.includes(n.op as string))
          throw new NotAllowed(
            `the operator '${n.op}' is not for formulas; there are ${OPERATORS.join(' ')}`,
          );
        return { kind: 'apply', op: n.op as string, args: (n.args ?? []).map(inner) };
      case 'FunctionNode':
        return { kind: 'apply', op: functionName(n), args: (n.args ?? []).map(inner) };
    }
    throw new NotAllowed(
      'a formula holds numbers, names, + - * / ^, parentheses and elementary functions, nothing else',
    );
  }

  #name(name: string): Formula {
    if (this.#names.includes(name)) {
      this.used.add(name);
      return { kind: 'name', name };
    }
    if (name === 'pi') return { kind: 'number', value: Math.PI };
    if (name === 'e') return { kind: 'number', value: Math.E };
    const near = guess(name, this.#names) || `; known here: ${this.#names.join(', ')}`;
    throw new NotAllowed(`unknown name ${show(name)} in the formula${near}`, name);
  }
}

/** @throws NotAllowed where it is no elementary function, or not called with what it takes. */
function functionName(n: Node): string {
  const name = n.fn?.type === 'SymbolNode' ? (n.fn.name as string) : '';
  if (!(FUNCTIONS as readonly string[]).includes(name))
    throw new NotAllowed(
      `${name === '' ? 'that' : show(name)} is not a function for formulas; there are ${FUNCTIONS.join(', ')}`,
    );
  const many = name === 'min' || name === 'max';
  const count = (n.args ?? []).length;
  if (many ? count < 2 : count !== 1)
    throw new NotAllowed(`${name} takes ${many ? 'two or more arguments' : 'one argument'}, got ${count}`);
  return name;
}
