import { pgTable, primaryKey, text, timestamp, uuid } from 'drizzle-orm/pg-core';
import { PROJECT_ROLES } from '#lib/contracts/roles.ts';
import { teams, users } from './teams.ts';

export const projects = pgTable('projects', {
	id: uuid().primaryKey().defaultRandom(),
	teamId: uuid()
		.notNull()
		.references(() => teams.id),
	name: text().notNull(),
	createdBy: uuid()
		.notNull()
		.references(() => users.id),
	createdAt: timestamp({ withTimezone: true }).notNull().defaultNow()
});

export const projectMembers = pgTable(
	'project_members',
	{
		projectId: uuid()
			.notNull()
			.references(() => projects.id, { onDelete: 'cascade' }),
		userId: uuid()
			.notNull()
			.references(() => users.id, { onDelete: 'cascade' }),
		role: text({ enum: PROJECT_ROLES }).notNull()
	},
	(table) => [primaryKey({ columns: [table.projectId, table.userId] })]
);
