import {
  create,
  type FunctionNode,
  type MathNode,
  type OperatorNode,
  type ParenthesisNode,
  parseDependencies,
  type SymbolNode,
} from 'mathjs/number'
import type { Expression } from './expression.ts'
import { isFunctionName } from './grammar.ts'
import type { Token } from './tokens.ts'

/**
 * Tokens of a checked right-hand side into a tree. The parser is mathjs's, and it sees no word of the user's: every
 * name and number is handed over as v0, v1, ... by its position, so that no name means anything to it. Of its tree only
 * a closed list of nodes is taken. Nothing is ever evaluated.
 */

const { parse } = create(parseDependencies ?? {})

/** A tree with the token each leaf and each call was read from. */
export interface ParsedTree {
  expression: Expression
  places: ReadonlyMap<Expression, Token>
}

/**
 * Builds the tree of tokens that `checkRightSide` has passed. `constants` are the keys that mean pi and e here (a
 * declared `e` is a symbol). Returns null where the parser reads something the format does not know, which the token
 * check should have told already.
 */
export function parseTree(tokens: readonly Token[], constants: ReadonlySet<string>): ParsedTree | null {
  let text = ''
  tokens.forEach((token, i) => {
    text += token.kind === 'number' || token.kind === 'name' ? `v${i}` : token.text
  })
  const places = new Map<Expression, Token>()
  try {
    const expression = fromNode(parse(text), tokens, constants, places)
    return expression === null ? null : { expression, places }
  } catch (error) {
    // The parser throws SyntaxError on text it cannot read; anything else is a fault of ours.
    if (error instanceof SyntaxError) return null
    throw error
  }
}

const operators = new Map<string, '+' | '-' | '*' | '/' | '^'>([
  ['add', '+'],
  ['subtract', '-'],
  ['multiply', '*'],
  ['divide', '/'],
  ['pow', '^'],
])

// Recursion is bounded: nesting by deepestNesting, sums and products by mostOperands.
function fromNode(
  node: MathNode,
  tokens: readonly Token[],
  constants: ReadonlySet<string>,
  places: Map<Expression, Token>,
): Expression | null {
  const read = (child: MathNode | undefined) => (child ? fromNode(child, tokens, constants, places) : null)
  const tokenOf = (name: string) => tokens[Number(name.slice(1))]
  if (isParenthesis(node)) return read(node.content)
  if (isSymbol(node)) {
    const token = tokenOf(node.name)
    const leaf = token ? leafOf(token, constants) : null
    if (token && leaf) places.set(leaf, token)
    return leaf
  }
  if (isOperator(node)) {
    const [first, second] = node.args
    if (node.args.length === 1) {
      const of = read(first)
      if (of === null || node.fn === 'unaryPlus') return of
      return node.fn === 'unaryMinus' ? { kind: 'negate', of } : null
    }
    const operator = operators.get(node.fn)
    const left = read(first)
    const right = read(second)
    return operator && left && right && node.args.length === 2 ? { kind: 'binary', operator, left, right } : null
  }
  if (isFunction(node)) {
    const token = isSymbol(node.fn) ? tokenOf(node.fn.name) : undefined
    const args = node.args.map(read).filter((arg) => arg !== null)
    if (!token?.key || !isFunctionName(token.key) || args.length !== node.args.length) return null
    const call: Expression = { kind: 'call', name: token.key, args }
    places.set(call, token)
    return call
  }
  return null
}

const isParenthesis = (node: MathNode): node is ParenthesisNode => node.type === 'ParenthesisNode'
const isSymbol = (node: MathNode): node is SymbolNode => node.type === 'SymbolNode'
const isOperator = (node: MathNode): node is OperatorNode<never, never, MathNode[]> => node.type === 'OperatorNode'
const isFunction = (node: MathNode): node is FunctionNode<SymbolNode, MathNode[]> => node.type === 'FunctionNode'

function leafOf(token: Token, constants: ReadonlySet<string>): Expression | null {
  if (token.kind === 'number') return { kind: 'number', value: token.value }
  if (token.key === null) return null
  if (constants.has(token.key) && (token.key === 'pi' || token.key === 'e'))
    return { kind: 'constant', name: token.key }
  return { kind: 'symbol', key: token.key }
}

/** The first token of an expression, which gives the line it stands on. */
export function firstToken(expression: Expression, places: ReadonlyMap<Expression, Token>): Token | undefined {
  for (let at = expression; ; ) {
    const own = places.get(at)
    if (own) return own
    if (at.kind === 'binary') at = at.left
    else if (at.kind === 'negate') at = at.of
    else return undefined
  }
}
