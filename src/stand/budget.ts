import { UserError } from '../text/errors.js';
import type { Stand } from './types.js';

/** Why a stand with `limits: budget` is not watched yet, in one sentence, and the mend. */
export const NO_BUDGET = [
  'Limits computed from a false-alarm budget are not part of this version.',
  "Write 'limits: textbook' under watch; kilter check then says what those limits cost.",
] as const;

/** @throws UserError where the stand asks for limits from a budget */
export function requireTextbook({ limits, file }: Stand): void {
  if (limits === 'budget') throw new UserError(NO_BUDGET[0], NO_BUDGET[1], { file });
}
