import { integer, jsonb, pgTable, text, timestamp, unique, uuid } from 'drizzle-orm/pg-core';
import type { Cell } from '#lib/floorplan/index.ts';
import type { RailStack } from '#lib/library/index.ts';
import { teams, users } from './teams.ts';

/** Rail stacks and regulator cells of a team; a new version is a new row. */
export const libraryItems = pgTable(
	'library_items',
	{
		id: uuid().primaryKey().defaultRandom(),
		teamId: uuid()
			.notNull()
			.references(() => teams.id),
		kind: text({ enum: ['stack', 'cell'] }).notNull(),
		/** Id by which floorplans refer to it. */
		key: text().notNull(),
		version: integer().notNull(),
		item: jsonb().$type<RailStack | Cell>().notNull(),
		createdBy: uuid()
			.notNull()
			.references(() => users.id),
		createdAt: timestamp({ withTimezone: true }).notNull().defaultNow()
	},
	(table) => [
		unique('library_items_version').on(table.teamId, table.kind, table.key, table.version)
	]
);
