import type { Formula } from './scenario.ts';
import { parseExpression, show } from './units.ts';

/** What a formula may call; everything else is refused, so that a file from a stranger can do no harm. */
export const FUNCTIONS = ['exp', 'log', 'ln', 'log10', 'sqrt', 'abs', 'min', 'max', 'tanh'] as const;
const OPERATORS = ['+', '-', '*', '/', '^'];
/** Characters in a formula and nested levels in its tree: far above any isotherm, far below any trouble. */
const LONGEST = 500;
const DEEPEST = 60;

export type ParsedFormula = { readonly formula: Formula } | { readonly wrong: string };

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
  if (typeof text === 'number') return { formula: { kind: 'number', value: text } };
  if (typeof text !== 'string')
    return { wrong: `expected a formula such as '18*c_a/(1 + 0.9*c_a)', got ${show(text)}` };
  if (text.length > LONGEST)
    return { wrong: `a formula may have ${LONGEST} characters, this has ${text.length}` };
  try {
    return { formula: translate(parseExpression(text) as Node, names, 0) };
  } catch (e) {
    if (e instanceof NotAllowed) return { wrong: e.message };
    const at = (e as { char?: number }).char;
    return { wrong: `not a formula${at === undefined ? '' : ` (at character ${at})`}: ${show(text)}` };
  }
}

class NotAllowed extends Error {}

function translate(n: Node, names: readonly string[], depth: number): Formula {
  if (depth > DEEPEST) throw new NotAllowed('the formula is nested too deeply');
  const inner = (a: Node): Formula => translate(a, names, depth + 1);
  switch (n.type) {
    case 'ConstantNode':
      if (typeof n.value !== 'number' || !Number.isFinite(n.value)) break;
      return { kind: 'number', value: n.value };
    case 'ParenthesisNode':
      return inner(n.content as Node);
    case 'SymbolNode': {
      const name = n.name as string;
      if (names.includes(name)) return { kind: 'name', name };
      if (name === 'pi') return { kind: 'number', value: Math.PI };
      if (name === 'e') return { kind: 'number', value: Math.E };
      throw new NotAllowed(`unknown name '${name}' in the formula; known here: ${names.join(', ')}`);
    }
    case 'OperatorNode':
      if (n.implicit) throw new NotAllowed('write a multiplication with *');
      if (!OPERATORS.includes(n.op as string))
        throw new NotAllowed(`the operator '${n.op}' is not for formulas`);
      return { kind: 'apply', op: n.op as string, args: (n.args ?? []).map(inner) };
    case 'FunctionNode': {
      const name = n.fn?.type === 'SymbolNode' ? (n.fn.name as string) : '';
      if (!(FUNCTIONS as readonly string[]).includes(name))
        throw new NotAllowed(
          `'${name || 'that'}' is not a function for formulas; there are ${FUNCTIONS.join(', ')}`,
        );
      const args = (n.args ?? []).map(inner);
      const many = name === 'min' || name === 'max';
      if (many ? args.length < 2 : args.length !== 1)
        throw new NotAllowed(`${name} takes ${many ? 'two or more arguments' : 'one argument'}`);
      return { kind: 'apply', op: name, args };
    }
  }
  throw new NotAllowed(
    'a formula holds numbers, names, + - * / ^, parentheses and elementary functions, nothing else',
  );
}
