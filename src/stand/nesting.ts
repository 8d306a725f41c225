import { Lexer } from 'yaml';

const DEEPEST = 50;
const WIDEST = 200;

/**
 * Where a YAML text nests deeper than any stand file does, as an offset; null where it does not. The parser calls itself
 * at each level: thousands of brackets would end the program, not the parsing.
 */
export function tooDeep(text: string): number | null {
  let offset = 0;
  let brackets = 0;
  let onLine = 0;
  let content = false;
  for (const token of new Lexer().lex(text)) {
    if (token === '\u001f' || token === '\u0002' || token === '\u0018') {
      content = token === '\u001f'; // marks of the lexer that stand for no text
      continue;
    }
    if (content) content = false;
    else if (token === '[' || token === '{') brackets++;
    else if (token === ']' || token === '}') brackets = Math.max(0, brackets - 1);
    else if (token === '-' || token === '?' || token === ':') onLine++;
    else if (token === '\n' || token === '\r\n') onLine = 0;
    else if (/^ +$/.test(token) && token.length > WIDEST && onLine === 0) return offset;
    if (brackets > DEEPEST || (onLine > DEEPEST && brackets === 0)) return offset;
    offset += token.length;
  }
  return null;
}
