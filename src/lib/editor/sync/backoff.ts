/** First wait before a request is sent again, ms. */
const FIRST_MS = 500;
/** Longest wait, ms. */
const LONGEST_MS = 30_000;

/**
 * Wait before the next attempt, ms: doubled each time up to a bound, and spread by up to a quarter
 * by the client's own seed, so that pages do not all return at once when a server comes back.
 *
 * @param attempt failed attempts so far, from 1
 * @param seed anything of the client's own, such as the id of its next edit
 */
export function backoffMs(attempt: number, seed: string): number {
	const wait = Math.min(LONGEST_MS, FIRST_MS * 2 ** Math.min(attempt - 1, 16));
	let hash = attempt;
	for (let i = 0; i < seed.length; i++) hash = (hash * 31 + seed.charCodeAt(i)) % 1009;
	return Math.round(wait * (1 + hash / 1009 / 4));
}
