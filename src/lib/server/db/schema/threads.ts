import {
	bigserial,
	doublePrecision,
	index,
	pgTable,
	text,
	timestamp,
	uuid
} from 'drizzle-orm/pg-core';
import { ITEM_LISTS } from '#lib/floorplan/index.ts';
import { floorplans } from './floorplans.ts';
import { revisions } from './revisions.ts';
import { users } from './teams.ts';

/** Talks about a draft or a revision, pinned to an object, to a place, or to the plan as a whole. */
export const threads = pgTable(
	'threads',
	{
		id: uuid().primaryKey().defaultRandom(),
		floorplanId: uuid()
			.notNull()
			.references(() => floorplans.id),
		/** Null for the draft. */
		revisionId: uuid().references(() => revisions.id),
		anchorKind: text({ enum: ['item', 'place', 'plan'] }).notNull(),
		/** Of the object; it may be deleted from the draft, and come back. */
		itemList: text({ enum: ITEM_LISTS }),
		itemId: text(),
		/** The place, um; of an object the last one known. Null for what stands nowhere. */
		xUm: doublePrecision(),
		yUm: doublePrecision(),
		openedBy: uuid()
			.notNull()
			.references(() => users.id),
		openedAt: timestamp({ withTimezone: true }).notNull().defaultNow()
	},
	(table) => [
		index('threads_floorplan').on(table.floorplanId),
		index('threads_revision').on(table.revisionId)
	]
);

/** What was written; a deleted comment keeps its row, so that the thread keeps its shape. */
export const comments = pgTable(
	'comments',
	{
		id: uuid().primaryKey().defaultRandom(),
		threadId: uuid()
			.notNull()
			.references(() => threads.id),
		/** Emptied when it is deleted. */
		text: text().notNull(),
		userId: uuid()
			.notNull()
			.references(() => users.id),
		at: timestamp({ withTimezone: true }).notNull().defaultNow(),
		deletedAt: timestamp({ withTimezone: true })
	},
	(table) => [index('comments_thread').on(table.threadId)]
);

/** Who resolved and reopened a thread, and when; the last line tells whether it is resolved. */
export const threadActs = pgTable(
	'thread_acts',
	{
		id: bigserial({ mode: 'number' }).primaryKey(),
		threadId: uuid()
			.notNull()
			.references(() => threads.id),
		act: text({ enum: ['resolve', 'reopen'] }).notNull(),
		userId: uuid()
			.notNull()
			.references(() => users.id),
		at: timestamp({ withTimezone: true }).notNull().defaultNow()
	},
	(table) => [index('thread_acts_thread').on(table.threadId)]
);
