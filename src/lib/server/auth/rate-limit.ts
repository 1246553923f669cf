import { RateLimiterDrizzle, RateLimiterRes } from 'rate-limiter-flexible';
import type { Database } from '../db/client.ts';
import { rateLimits } from '../db/schema/index.ts';
import { Problem } from '../problem.ts';

const MINUTE = 60;
const DAY = 24 * 60 * MINUTE;

/** How many tries in how many seconds; counted in the database, so over all processes. */
const RULES = {
	/** Passwords for one account, from wherever nobody has signed in to it lately. */
	'sign-in-account': { points: 10, duration: 15 * MINUTE },
	/** Passwords for one account from an address from which somebody has. */
	'sign-in-known': { points: 10, duration: 15 * MINUTE },
	/** Passwords from one address. */
	'sign-in-address': { points: 50, duration: 15 * MINUTE },
	/** New teams from one address. */
	'sign-up-address': { points: 20, duration: 60 * MINUTE },
	/** The present password, asked for again, by account. */
	'confirm-password': { points: 10, duration: 15 * MINUTE },
	/** No limit: the addresses from which an account was signed in to. */
	'known-address': { points: 1, duration: 30 * DAY }
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

function keyOf(...parts: string[]): string {
	return parts
		.map((part) => part.toLowerCase())
		.join('|')
		.slice(0, 300);
}

/** Counts one try; throws a problem with the waiting time where there were too many. */
export async function countTry(db: Database, rule: RateRule, key: string): Promise<void> {
	try {
		await limiter(db, rule).consume(keyOf(key));
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
	await limiter(db, rule).delete(keyOf(key));
}

/**
 * Counts a try to sign in, by address and by account. An address from which the account was signed
 * in to lately has a count of its own: whoever guesses at an account from elsewhere slows the
 * guessing down, and does not keep its owner out.
 */
export async function countSignIn(db: Database, email: string, address: string): Promise<void> {
	await countTry(db, 'sign-in-address', address);
	const pair = keyOf(email, address);
	const isKnown = (await limiter(db, 'known-address').get(pair)) !== null;
	await countTry(db, isKnown ? 'sign-in-known' : 'sign-in-account', isKnown ? pair : email);
}

/** Notes that a try was right: it does not count, and the address is known from now on. */
export async function noteSignIn(db: Database, email: string, address: string): Promise<void> {
	const pair = keyOf(email, address);
	await forgetTries(db, 'sign-in-known', pair);
	await forgetTries(db, 'sign-in-account', email);
	await limiter(db, 'known-address').set(pair, 1, RULES['known-address'].duration);
}
