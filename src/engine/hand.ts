/**
 * The reading at hand: one array that the parts of a channel share. A double that is handed to a call which is not
 * inlined is boxed on the heap; one that stands in a shared array is not, and a quiet reading must allocate nothing.
 *
 * Hot loops take these names over into constants of their own file: the compiler of today's Node folds those, but loads an
 * imported one at each use.
 */
export const VALUE = 0;
/** (value - centre) / sigma; NaN while there is no band. */
export const Z = 1;
/** ms since the epoch. */
export const TIME = 2;
/** Counted from 0; -1 before the first reading. */
export const INDEX = 3;
export const HAND_FIELDS = 4;
