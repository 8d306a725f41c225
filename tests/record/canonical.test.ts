import { describe, expect, it } from 'vitest';
import { link, ORIGIN, seal } from '../../src/record/chain.js';

/** What stands on the line but the chain's own key; keys of the examples that sort behind and before it are both covered. */
function canonical(value: unknown): string {
  const { head, tail } = seal({ value });
  expect(head).toBe('{');
  return tail.slice(',"value":'.length, -1);
}

function fromBits(hex: string): number {
  return Buffer.from(hex, 'hex').readDoubleBE(0);
}

// The vectors are those that RFC 8785 publishes, written down from memory.
describe('numbers: RFC 8785, appendix B (IEEE 754 bits and their JSON)', () => {
  it.each([
    ['0000000000000000', '0'],
    ['8000000000000000', '0'],
    ['0000000000000001', '5e-324'],
    ['8000000000000001', '-5e-324'],
    ['7fefffffffffffff', '1.7976931348623157e+308'],
    ['ffefffffffffffff', '-1.7976931348623157e+308'],
    ['4340000000000000', '9007199254740992'],
    ['c340000000000000', '-9007199254740992'],
    ['4430000000000000', '295147905179352830000'],
    ['44b52d02c7e14af5', '9.999999999999997e+22'],
    ['44b52d02c7e14af6', '1e+23'],
    ['44b52d02c7e14af7', '1.0000000000000001e+23'],
    ['444b1ae4d6e2ef4e', '999999999999999700000'],
    ['444b1ae4d6e2ef4f', '999999999999999900000'],
    ['444b1ae4d6e2ef50', '1e+21'],
    ['3eb0c6f7a0b5ed8c', '9.999999999999997e-7'],
    ['3eb0c6f7a0b5ed8d', '0.000001'],
    ['41b3de4355555553', '333333333.3333332'],
    ['41b3de4355555554', '333333333.33333325'],
    ['41b3de4355555555', '333333333.3333333'],
    ['41b3de4355555556', '333333333.3333334'],
    ['41b3de4355555557', '333333333.33333343'],
    ['becbf647612f3696', '-0.0000033333333333333333'],
    ['43143ff3c1cb0959', '1424953923781206.2'],
  ])('%s is %s', (bits, text) => {
    expect(canonical(fromBits(bits))).toBe(text);
  });

  it('what is no number in JSON (appendix B: an error there) becomes null here, for an alarm must not be lost over it', () => {
    for (const bits of ['7fffffffffffffff', '7ff0000000000000']) expect(canonical(fromBits(bits))).toBe('null');
  });
});

describe('RFC 8785, section 3.2', () => {
  // Section 3.2.2: the sample object, and 3.2.3: its canonical form (3.2.4 gives it as the bytes below).
  const SAMPLE = `{
    "numbers": [333333333.33333329, 1E30, 4.50, 2e-3, 0.000000000000000000000000001],
    "string": "\\u20ac$\\u000F\\u000aA'\\u0042\\u0022\\u005c\\\\\\"\\/",
    "literals": [null, true, false]
  }`;
  const BYTES =
    '7b226c69746572616c73223a5b6e756c6c2c747275652c66616c73655d2c226e756d62657273223a5b3333333333333333332e3333333333' +
    '33332c31652b33302c342e352c302e3030322c31652d32375d2c22737472696e67223a22e282ac245c75303030665c6e4127425c225c5c' +
    '5c5c5c222f227d';

  it('the sample gives the published bytes', () => {
    expect(Buffer.from(canonical(JSON.parse(SAMPLE))).toString('hex')).toBe(BYTES);
  });

  it('keys sort by UTF-16 code units (section 3.2.3, the example of sorting)', () => {
    const keys = { '\u20ac': 'Euro Sign', '\r': 'Carriage Return', '\ufb33': 'Hebrew Letter Dalet With Dagesh', '1': 'One', '\ud83d\ude00': 'Emoji: Grinning Face', '\u0080': 'Control', '\u00f6': 'Latin Small Letter O With Diaeresis' };
    const sorted = ['Carriage Return', 'One', 'Control', 'Latin Small Letter O With Diaeresis', 'Euro Sign', 'Emoji: Grinning Face', 'Hebrew Letter Dalet With Dagesh'];
    expect([...canonical(keys).matchAll(/:"([^"]*?)"(?=[,}])/g)].map(([, value]) => value)).toEqual(sorted);
  });
});

describe('the line', () => {
  it("takes its own key's place in the order, whatever stands around it", () => {
    const { line } = link({ zulu: 1, alpha: 2, 'previous\0': 3, previouS: 4, previous: 'forged' }, ORIGIN);
    expect(line).toBe(`{"alpha":2,"previouS":4,"previous":"${ORIGIN}","previous\\u0000":3,"zulu":1}`);
    expect(link({}, ORIGIN).line).toBe(`{"previous":"${ORIGIN}"}`);
  });

  it('a lone surrogate becomes U+FFFD, in values and in keys', () => {
    expect(canonical({ a: '\ud800x', '\udfff': 1 })).toBe('{"a":"\ufffdx","\ufffd":1}');
  });

  it('refuses what is no JSON, and what is longer than a line', () => {
    const circle: Record<string, unknown> = {};
    circle['self'] = circle;
    expect(() => seal(circle)).toThrow();
    expect(() => seal({ big: 1n })).toThrow(TypeError);
    expect(() => seal({ text: 'x'.repeat(1 << 20) })).toThrow(RangeError);
  });
});
