/** FNV-1a, 32 bits (Fowler, Noll and Vo), over a text's code units and, if given, bytes after it. Against chance, not against malice. */
export function fingerprint(text: string, bytes?: Uint8Array): number {
  let hash = 0x811c9dc5;
  for (let i = 0; i < text.length; i++) hash = Math.imul(hash ^ text.charCodeAt(i), 0x01000193);
  if (bytes) for (let i = 0; i < bytes.length; i++) hash = Math.imul(hash ^ bytes[i]!, 0x01000193);
  return hash >>> 0;
}
