/** What a Python literal of plain values can hold; tuples and lists are both arrays. */
export type Literal = string | number | boolean | null | Literal[] | Map<string, Literal>;

/** Deeper than any header of NumPy, shallow enough for the stack. */
const mostDepth = 32;
const escapes: Record<string, string> = { n: '\n', t: '\t', r: '\r', '\\': '\\', "'": "'", '"': '"' };
const words: [string, Literal][] = [
  ['True', true],
  ['False', false],
  ['None', null],
];

/**
 * A Python literal as NumPy writes its headers: dictionaries with text keys, tuples, lists, text, whole numbers, True,
 * False and None, blanks around. Anything else throws a SyntaxError; nothing is evaluated.
 */
export function parseLiteral(text: string): Literal {
  let at = 0;

  function fail(expected: string): never {
    throw new SyntaxError(`expected ${expected} at character ${at}`);
  }

  function skipBlanks(): void {
    while (at < text.length && ' \t\r\n'.includes(text[at]!)) at += 1;
  }

  function takes(character: string): boolean {
    skipBlanks();
    if (text[at] !== character) return false;
    at += 1;
    return true;
  }

  function parseString(): string {
    const quote = text[at]!;
    let parsed = '';
    for (at += 1; text[at] !== quote; at += 1) {
      if (at >= text.length) fail('the end of a text');
      parsed += text[at] === '\\' ? parseEscape() : text[at];
    }
    at += 1;
    return parsed;
  }

  /** Leaves `at` on the last character of the escape. */
  function parseEscape(): string {
    at += 1;
    const known = escapes[text[at] ?? ''];
    if (known !== undefined) return known;
    const digits = { x: 2, u: 4, U: 8 }[text[at] ?? ''];
    const code = digits === undefined ? '' : text.slice(at + 1, at + 1 + digits);
    if (digits === undefined || code.length !== digits || !/^[0-9a-fA-F]+$/.test(code))
      fail('a known escape');
    const point = Number.parseInt(code, 16);
    if (point > 0x10ffff) fail('a character of Unicode');
    at += digits;
    return String.fromCodePoint(point);
  }

  function parseNumber(): number {
    // Python 2 wrote long integers with an L.
    const digits = /^-?\d{1,16}(?=L?(?![\w.]))/.exec(text.slice(at, at + 20))?.[0];
    if (digits === undefined || !Number.isSafeInteger(Number(digits))) fail('a whole number below 2^53');
    at += digits.length;
    if (text[at] === 'L') at += 1;
    return Number(digits);
  }

  function parseItems(close: string, depth: number): Literal[] {
    const items: Literal[] = [];
    while (!takes(close)) {
      items.push(parseValue(depth + 1));
      if (!takes(',')) {
        if (!takes(close)) fail(`"," or "${close}"`);
        break;
      }
    }
    return items;
  }

  function parseDictionary(depth: number): Map<string, Literal> {
    const entries = new Map<string, Literal>();
    while (!takes('}')) {
      skipBlanks();
      if (text[at] !== "'" && text[at] !== '"') fail('a key in quotes');
      const key = parseString();
      if (entries.has(key)) fail(`one "${key}" only`);
      if (!takes(':')) fail('":"');
      entries.set(key, parseValue(depth + 1));
      if (!takes(',')) {
        if (!takes('}')) fail('"," or "}"');
        break;
      }
    }
    return entries;
  }

  function parseParenthesis(depth: number): Literal {
    const start = at;
    const items = parseItems(')', depth);
    // One value in parentheses is that value, unless a comma makes it a tuple.
    const isTuple = items.length !== 1 || /,\s*\)$/.test(text.slice(start, at));
    return isTuple ? items : items[0]!;
  }

  function parseValue(depth: number): Literal {
    if (depth > mostDepth) fail('less nesting');
    skipBlanks();
    if (text[at] === "'" || text[at] === '"') return parseString();
    if (takes('{')) return parseDictionary(depth);
    if (takes('[')) return parseItems(']', depth);
    if (takes('(')) return parseParenthesis(depth);
    for (const [word, value] of words) {
      if (text.startsWith(word, at) && !/\w/.test(text[at + word.length] ?? '')) {
        at += word.length;
        return value;
      }
    }
    return parseNumber();
  }

  const value = parseValue(0);
  skipBlanks();
  if (at < text.length) fail('the end');
  return value;
}
