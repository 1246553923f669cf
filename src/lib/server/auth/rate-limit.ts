import { RateLimiterDrizzle, RateLimiterRes } from 'rate-limiter-flexible';
import type { Database } from '../db/client.ts';
import { rateLimits } from '../db/schema/index.ts';
import { Problem } from '../problem.ts';

/**
 * Guessing is slowed by account and by address, over all processes, and for minutes only: nobody
 * can lock somebody else out for good.
 */
const RULES = {
	/** Wrong passwords for one account. */
	'sign-in-account': { points: 10, duration: 15 * 60 },
	/** Wrong passwords from one address. */
	'sign-in-address': { points: 50, duration: 15 * 60 },
	/** New teams from one address. */
	'sign-up-address': { points: 20, duration: 60 * 60 }
} as const;

export type RateRule = keyof typeof RULES;

const limiters = new WeakMap<Database, Map<RateRule, RateLimiterDrizzle>>();

function limiter(db: Database, rule: RateRule): RateLimiterDrizzle {
	const known = limiters.get(db) ?? new Map<RateRule, RateLimiterDrizzle>();
	limiters.set(db, known);
	const found =
		known.get(rule) ??
		new RateLimiterDrizzle({
			storeClient: db,
			schema: rateLimits,
			keyPrefix: rule,
			...RULES[rule]
		});
	known.set(rule, found);
	return found;
}

/** Counts one try; throws a problem with the waiting time where there were too many. */
export async function countTry(db: Database, rule: RateRule, key: string): Promise<void> {
	try {
		await limiter(db, rule).consume(key.toLowerCase().slice(0, 300));
	} catch (reason) {
		if (!(reason instanceof RateLimiterRes)) throw reason;
		const seconds = Math.max(1, Math.ceil(reason.msBeforeNext / 1000));
		const minutes = Math.ceil(seconds / 60);
		throw new Problem('too-many', `Too many tries. Wait ${minutes} min and try again.`, {
			retryAfterSeconds: seconds
		});
	}
}

/** Forgets the tries, after one that was right. */
export async function forgetTries(db: Database, rule: RateRule, key: string): Promise<void> {
	await limiter(db, rule).delete(key.toLowerCase().slice(0, 300));
}
