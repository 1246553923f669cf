import { bigserial, index, jsonb, pgTable, text, timestamp, uuid } from 'drizzle-orm/pg-core';

/**
 * Who did what, when, to which object, and how it ended. A trigger refuses to change or remove an
 * entry. No foreign keys: an entry outlives what it is about.
 */
export const auditEvents = pgTable(
	'audit_events',
	{
		id: bigserial({ mode: 'number' }).primaryKey(),
		at: timestamp({ withTimezone: true }).notNull().defaultNow(),
		teamId: uuid(),
		userId: uuid(),
		action: text().notNull(),
		objectKind: text().notNull(),
		objectId: text().notNull(),
		outcome: text({ enum: ['done', 'refused'] }).notNull(),
		requestId: text().notNull(),
		detail: jsonb().$type<Record<string, unknown>>().notNull().default({})
	},
	(table) => [index('audit_events_team').on(table.teamId, table.at)]
);
