/**
 * Does the terminal's locale say that it shows UTF-8? LC_ALL, else LC_CTYPE, else LANG decides; the first that is set
 * and not empty (POSIX, Base Definitions, 8.2).
 */
export function speaksUtf8(environment: Readonly<Record<string, string | undefined>>): boolean {
  const locale = [environment['LC_ALL'], environment['LC_CTYPE'], environment['LANG']].find(Boolean) ?? '';
  return /utf-?8/i.test(locale);
}
