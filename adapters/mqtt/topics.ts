/**
 * Topic names and topic filters by MQTT 3.1.1 and 5, section 4.7: `+` stands for one level, `#` for all that follow and
 * for the level above; neither stands for a first level that begins with `$`.
 */

export const isFilter = (topic: string): boolean => topic.includes('+') || topic.includes('#');

/** Whether bytes that were no UTF-8, or a NUL, stood in a topic: MQTT forbids both, not every broker does. */
export const isTopicText = (topic: string): boolean => !topic.includes('\u0000') && !topic.includes('\ufffd');

/** Compiles a filter to a test of topics. */
export function matcher(filter: string): (topic: string) => boolean {
  const want = filter.split('/');
  const open = want.at(-1) === '#';
  if (open) want.pop();
  const hidden = filter.startsWith('$');
  return (topic) => {
    if (topic.startsWith('$') && !hidden) return false;
    const levels = topic.split('/');
    if (open ? levels.length < want.length : levels.length !== want.length) return false;
    return want.every((level, i) => level === '+' || level === levels[i]);
  };
}

/** Whether there is a topic that both filters match. */
export function overlap(one: string, other: string): boolean {
  const a = one.split('/');
  const b = other.split('/');
  if (one.startsWith('$') !== other.startsWith('$')) return false;
  for (let i = 0; i < a.length || i < b.length; i++) {
    if (a[i] === '#' || b[i] === '#') return true;
    if (i >= a.length || i >= b.length) return false;
    if (a[i] !== b[i] && a[i] !== '+' && b[i] !== '+') return false;
  }
  return true;
}

/** The narrowest filter that matches whatever either of two overlapping filters does. */
export function join(one: string, other: string): string {
  const a = one.split('/');
  const b = other.split('/');
  const joined: string[] = [];
  for (let i = 0; i < a.length && i < b.length; i++) {
    if (a[i] === '#' || b[i] === '#') return [...joined, '#'].join('/');
    joined.push(a[i] === b[i] ? a[i]! : '+');
  }
  if (a.length !== b.length) joined.push('#'); // one of them ends in '#', which stands for its parent too
  return joined.join('/');
}

/**
 * Filters of which no two match the same topic, and which together match all that the given ones do. A broker may
 * deliver a message once for each filter that matches it (4.3 of both standards leaves it free to), and nothing in MQTT
 * 3.1.1 tells such a copy from a second reading. The price: a joined filter may bring messages that nobody asked for.
 */
export function disjoint(filters: readonly string[]): string[] {
  const apart: string[] = [];
  for (const filter of new Set(filters)) {
    let wide = filter;
    for (let i = apart.findIndex((other) => overlap(wide, other)); i >= 0; i = apart.findIndex((other) => overlap(wide, other)))
      wide = join(wide, ...(apart.splice(i, 1) as [string]));
    apart.push(wide);
  }
  return apart;
}
