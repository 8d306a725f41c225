const CONTROLS = /[\u0000-\u001f\u007f-\u009f\u2028\u2029]/g; // C0, DEL, C1 (U+009B is CSI, U+009D is OSC), separators
const UNSEEN =
  /[\u00ad\u034f\u061c\u115f\u1160\u17b4\u17b5\u180b-\u180e\u200b-\u200f\u202a-\u202e\u2060-\u206f\ufe00-\ufe0f\ufeff\ufff9-\ufffb]|\p{M}|[\u{e0000}-\u{e0fff}]/gu;
const WIDE =
  /[\u1100-\u115f\u2329\u232a\u2e80-\u303e\u3041-\ua4cf\ua960-\ua97c\uac00-\ud7a3\uf900-\ufaff\ufe10-\ufe19\ufe30-\ufe6f\uff00-\uff60\uffe0-\uffe6]|[\u{10000}-\u{10ffff}]|[\ud800-\udfff]/gu;

/**
 * Text from outside (a payload, a topic, a name, a line of a file) made fit for a screen, a log or a message: every
 * character visible, one cell wide, no control or escape sequence, no hidden or direction-changing character.
 *
 * @param text anything; it is made a string
 * @param max greatest length of the answer in characters; a longer text ends in an ellipsis
 */
export function clean(text: unknown, max = 200): string {
  const visible = String(text)
    .slice(0, max * 4)
    .replace(CONTROLS, '·')
    .replace(UNSEEN, '')
    .replace(WIDE, '□');
  return visible.length > max ? visible.slice(0, Math.max(0, max - 1)) + '…' : visible;
}
