/**
 * What is wrong with an MQTT topic filter by MQTT 3.1.1 section 4.7, as the rest of a sentence; null where nothing is.
 * A broker drops a client with a wrong filter, again and again.
 */
export function topicFault(filter: string): string | null {
  if (filter === '') return 'is empty';
  if (new TextEncoder().encode(filter).length > 65535) return 'is longer than MQTT allows';
  if (filter.includes('\u0000')) return 'holds a NUL';
  if (filter.startsWith('$share/')) return 'shares its subscription with other clients, and would miss readings';
  const levels = filter.split('/');
  for (const [i, level] of levels.entries()) {
    if (level.includes('#') && (level !== '#' || i !== levels.length - 1)) return "has a '#' that does not stand alone at the end";
    if (level.includes('+') && level !== '+') return "has a '+' that does not stand alone between slashes";
  }
  return null;
}
