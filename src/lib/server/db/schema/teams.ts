import { sql } from 'drizzle-orm';
import {
	boolean,
	index,
	integer,
	pgTable,
	text,
	timestamp,
	uniqueIndex,
	uuid
} from 'drizzle-orm/pg-core';

export const teams = pgTable('teams', {
	id: uuid().primaryKey().defaultRandom(),
	name: text().notNull(),
	createdAt: timestamp({ withTimezone: true }).notNull().defaultNow()
});

/** People. An account belongs to one team; the admin of the team manages people and the library. */
export const users = pgTable(
	'users',
	{
		id: uuid().primaryKey().defaultRandom(),
		teamId: uuid()
			.notNull()
			.references(() => teams.id),
		email: text().notNull(),
		name: text().notNull(),
		/** argon2id, in the PHC string format. */
		passwordHash: text().notNull(),
		isTeamAdmin: boolean().notNull().default(false),
		createdAt: timestamp({ withTimezone: true }).notNull().defaultNow()
	},
	(table) => [uniqueIndex('users_email_key').on(sql`lower(${table.email})`)]
);

/** Signed-in browsers. The id is the SHA-256 of the token in the cookie: the table opens no door. */
export const sessions = pgTable(
	'sessions',
	{
		id: text().primaryKey(),
		userId: uuid()
			.notNull()
			.references(() => users.id, { onDelete: 'cascade' }),
		expiresAt: timestamp({ withTimezone: true }).notNull(),
		createdAt: timestamp({ withTimezone: true }).notNull().defaultNow(),
		userAgent: text().notNull().default('')
	},
	(table) => [index('sessions_user').on(table.userId)]
);

/** Counters of the rate limiter, shared by all processes. */
export const rateLimits = pgTable('rate_limits', {
	key: text().primaryKey(),
	points: integer().notNull(),
	expire: timestamp({ withTimezone: true })
});
