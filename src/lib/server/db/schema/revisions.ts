import {
	bigserial,
	doublePrecision,
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
import { PLAN_STATES, REVISION_STATES } from '#lib/contracts/revisions.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { FINDING_KINDS, FINDING_LISTS } from '#lib/results/index.ts';
import { floorplans } from './floorplans.ts';
import { results } from './jobs.ts';
import { users } from './teams.ts';

/**
 * Frozen floorplans, numbered from 1 in each, whole with rail stack and cells. Triggers refuse to
 * change or remove a row, of this table and of the others here: they only grow.
 */
export const revisions = pgTable(
	'revisions',
	{
		id: uuid().primaryKey().defaultRandom(),
		floorplanId: uuid()
			.notNull()
			.references(() => floorplans.id),
		number: integer().notNull(),
		/** Version of the draft that was frozen; frozen again it is the same revision. */
		draftVersion: integer().notNull(),
		/** SHA-256 of the canonical document. */
		hash: text().notNull(),
		document: jsonb().$type<Floorplan>().notNull(),
		title: text().notNull(),
		note: text().notNull(),
		frozenBy: uuid()
			.notNull()
			.references(() => users.id),
		frozenAt: timestamp({ withTimezone: true }).notNull().defaultNow()
	},
	(table) => [
		unique('revisions_number').on(table.floorplanId, table.number),
		unique('revisions_draft_version').on(table.floorplanId, table.draftVersion),
		index('revisions_hash').on(table.hash)
	]
);

/** Every move of a revision from state to state, its freezing first. The last one's is its state. */
export const revisionMoves = pgTable(
	'revision_moves',
	{
		id: bigserial({ mode: 'number' }).primaryKey(),
		revisionId: uuid()
			.notNull()
			.references(() => revisions.id),
		/** Counted from 1: of two moves at once only one can be the next. */
		position: integer().notNull(),
		fromState: text({ enum: PLAN_STATES }).notNull(),
		toState: text({ enum: REVISION_STATES }).notNull(),
		/** Hash of the content that the move is about. */
		hash: text().notNull(),
		note: text().notNull(),
		userId: uuid()
			.notNull()
			.references(() => users.id),
		at: timestamp({ withTimezone: true }).notNull().defaultNow()
	},
	(table) => [unique('revision_moves_position').on(table.revisionId, table.position)]
);

/** The result that a revision has of a mode and corner: bound once, and kept from then on. */
export const revisionResults = pgTable(
	'revision_results',
	{
		revisionId: uuid()
			.notNull()
			.references(() => revisions.id),
		mode: text().notNull(),
		corner: text().notNull(),
		resultId: uuid()
			.notNull()
			.references(() => results.id, { onDelete: 'restrict' }),
		at: timestamp({ withTimezone: true }).notNull().defaultNow()
	},
	(table) => [
		primaryKey({ columns: [table.revisionId, table.mode, table.corner] }),
		index('revision_results_result').on(table.resultId)
	]
);

/**
 * Limits that a revision breaks, written when its result of that mode and corner is bound. Kind,
 * list, subject, partner, mode and corner are a finding's identity over the revisions of a floorplan.
 */
export const revisionFindings = pgTable(
	'revision_findings',
	{
		id: uuid().primaryKey().defaultRandom(),
		revisionId: uuid()
			.notNull()
			.references(() => revisions.id),
		kind: text({ enum: FINDING_KINDS }).notNull(),
		list: text({ enum: FINDING_LISTS }).notNull(),
		subject: text().notNull(),
		/** Empty where the subject says it all. */
		partner: text().notNull(),
		mode: text().notNull(),
		corner: text().notNull(),
		value: doublePrecision().notNull(),
		limit: doublePrecision().notNull(),
		unit: text({ enum: ['V', 'A', 'um', ''] }).notNull(),
		message: text().notNull(),
		/** Place, um; null for what has none. */
		xUm: doublePrecision(),
		yUm: doublePrecision()
	},
	(table) => [
		unique('revision_findings_identity').on(
			table.revisionId,
			table.mode,
			table.corner,
			table.kind,
			table.list,
			table.subject,
			table.partner
		)
	]
);
