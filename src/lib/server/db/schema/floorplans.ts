import {
	bigserial,
	index,
	integer,
	jsonb,
	pgTable,
	primaryKey,
	text,
	timestamp,
	unique,
	uuid
} from 'drizzle-orm/pg-core';
import type { Floorplan } from '#lib/floorplan/index.ts';
import type { Operation } from '#lib/floorplan/edits/index.ts';
import { projects } from './projects.ts';
import { users } from './teams.ts';

/** The draft of a floorplan: the whole document, its version counted up by each edit. */
export const floorplans = pgTable(
	'floorplans',
	{
		id: uuid().primaryKey().defaultRandom(),
		projectId: uuid()
			.notNull()
			.references(() => projects.id, { onDelete: 'cascade' }),
		name: text().notNull(),
		version: integer().notNull().default(1),
		/** SHA-256 of the canonical document. */
		hash: text().notNull(),
		document: jsonb().$type<Floorplan>().notNull(),
		createdBy: uuid()
			.notNull()
			.references(() => users.id),
		createdAt: timestamp({ withTimezone: true }).notNull().defaultNow(),
		updatedBy: uuid()
			.notNull()
			.references(() => users.id),
		updatedAt: timestamp({ withTimezone: true }).notNull().defaultNow()
	},
	(table) => [index('floorplans_project').on(table.projectId)]
);

/** Every edit ever accepted, in order; a trigger refuses to change or remove one. */
export const floorplanEdits = pgTable(
	'floorplan_edits',
	{
		id: bigserial({ mode: 'number' }).primaryKey(),
		floorplanId: uuid()
			.notNull()
			.references(() => floorplans.id),
		/** Identity that the client gave it: an edit sent twice is accepted once. */
		editId: uuid().notNull(),
		label: text().notNull(),
		operations: jsonb().$type<Operation[]>().notNull(),
		/** Version that its author saw. */
		baseVersion: integer().notNull(),
		/** Version that it made; it followed the one before. */
		toVersion: integer().notNull(),
		/** Hash of the document after it. */
		toHash: text().notNull(),
		userId: uuid()
			.notNull()
			.references(() => users.id),
		at: timestamp({ withTimezone: true }).notNull().defaultNow()
	},
	(table) => [
		unique('floorplan_edits_edit').on(table.floorplanId, table.editId),
		unique('floorplan_edits_version').on(table.floorplanId, table.toVersion)
	]
);

/**
 * Documents that work was asked for, each content once in a project: a job and a result name theirs
 * by its hash, and stay true to it while the draft goes on.
 */
export const documents = pgTable(
	'documents',
	{
		projectId: uuid()
			.notNull()
			.references(() => projects.id, { onDelete: 'cascade' }),
		hash: text().notNull(),
		document: jsonb().$type<Floorplan>().notNull(),
		createdAt: timestamp({ withTimezone: true }).notNull().defaultNow()
	},
	(table) => [primaryKey({ columns: [table.projectId, table.hash] })]
);
