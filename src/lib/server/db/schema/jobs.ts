import { sql } from 'drizzle-orm';
import {
	customType,
	doublePrecision,
	index,
	integer,
	json,
	jsonb,
	pgTable,
	primaryKey,
	text,
	timestamp,
	unique,
	uniqueIndex,
	uuid
} from 'drizzle-orm/pg-core';
import { JOB_STATES, type JobFailure } from '#lib/contracts/jobs.ts';
import type { ResultFile } from '#lib/results/index.ts';
import { floorplans } from './floorplans.ts';
import { projects } from './projects.ts';
import { teams, users } from './teams.ts';

export interface ResultFigures {
	/** Largest drop over the regulated nets. */
	readonly worstDropV: number;
	/** What the worst place has left of its limit; null where nothing is limited. */
	readonly worstMarginV: number | null;
	readonly findings: number;
}

const bytea = customType<{ data: Uint8Array; driverData: Uint8Array }>({
	dataType: () => 'bytea'
});

/** Background work. The queue only carries the id; state, progress and outcome are kept here. */
export const jobs = pgTable(
	'jobs',
	{
		id: uuid().primaryKey().defaultRandom(),
		kind: text().notNull(),
		input: jsonb().$type<unknown>().notNull(),
		/** Equal unfinished work shares one job. */
		dedupeKey: text().notNull(),
		state: text({ enum: JOB_STATES }).notNull().default('queued'),
		phase: text().notNull().default(''),
		/** Part done, 0 to 1. */
		progress: doublePrecision().notNull().default(0),
		/** Counted up at each start; a late attempt finds that it is no longer its turn. */
		attempt: integer().notNull().default(0),
		failure: jsonb().$type<JobFailure>(),
		teamId: uuid()
			.notNull()
			.references(() => teams.id),
		floorplanId: uuid().references(() => floorplans.id, { onDelete: 'cascade' }),
		requestedBy: uuid()
			.notNull()
			.references(() => users.id),
		createdAt: timestamp({ withTimezone: true }).notNull().defaultNow(),
		startedAt: timestamp({ withTimezone: true }),
		finishedAt: timestamp({ withTimezone: true })
	},
	(table) => [
		index('jobs_floorplan').on(table.floorplanId, table.createdAt),
		uniqueIndex('jobs_unfinished')
			.on(table.dedupeKey)
			.where(sql`${table.state} in ('queued', 'running')`)
	]
);

/** What a solve found. Results of one document, mode, corner and solver version are kept once. */
export const results = pgTable(
	'results',
	{
		id: uuid().primaryKey().defaultRandom(),
		projectId: uuid()
			.notNull()
			.references(() => projects.id, { onDelete: 'cascade' }),
		documentHash: text().notNull(),
		mode: text().notNull(),
		corner: text().notNull(),
		solverVersion: text().notNull(),
		/** The result file, as text: its numbers keep every digit. */
		file: json().$type<ResultFile>().notNull(),
		/** The few figures that overviews show, so that they need not read the whole file. */
		figures: jsonb().$type<ResultFigures>().notNull(),
		createdAt: timestamp({ withTimezone: true }).notNull().defaultNow()
	},
	(table) => [
		unique('results_identity').on(
			table.projectId,
			table.documentHash,
			table.mode,
			table.corner,
			table.solverVersion
		)
	]
);

/** Large fields of a result as gzip-compressed binary, one per net. */
export const resultMaps = pgTable(
	'result_maps',
	{
		resultId: uuid()
			.notNull()
			.references(() => results.id, { onDelete: 'cascade' }),
		net: text().notNull(),
		/** `encodeDropMap`, compressed with gzip. */
		gzip: bytea().notNull()
	},
	(table) => [primaryKey({ columns: [table.resultId, table.net] })]
);

/**
 * Worker processes that are alive. Each holds the advisory lock `lockKey` on a connection of its
 * own; the database frees the lock when the process dies, and another worker then returns its jobs.
 */
export const workers = pgTable('workers', {
	lockKey: integer().primaryKey().generatedAlwaysAsIdentity(),
	/** Ids under which the queue knows this process. */
	queueWorkerIds: text().array().notNull().default([]),
	startedAt: timestamp({ withTimezone: true }).notNull().defaultNow()
});
