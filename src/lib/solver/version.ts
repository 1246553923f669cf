/**
 * Counted up when the same document would give other numbers, so that kept results of an older
 * solver are not taken for an answer of this one.
 */
export const SOLVER_VERSION = '3';
