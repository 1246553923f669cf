/**
 * Most straps that a plan may have. Far above any plan that can be solved; it turns a mistyped pitch
 * into a sentence instead of an endless run.
 */
export const MAX_RUNS = 2_000_000;

/**
 * Most nodes that a network may have. Its arrays take about 100 bytes a node with the resistors and
 * loads that come with it, so this stays within what a 64-bit process can hold.
 */
export const MAX_NODES = 20_000_000;

/** Pieces into which a strap is divided where nothing crosses it (model section 3.4). */
export const PIECES_WITHOUT_CROSSINGS = 40;
