import { z } from 'zod';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { FINDING_KINDS, FINDING_LISTS } from '#lib/results/index.ts';
import { jobSchema } from './jobs.ts';
import { PROJECT_ROLES, type Action } from './roles.ts';

/**
 * Where a plan stands. A draft becomes a revision by being frozen; from then on its content never
 * changes, only its state.
 */
export const PLAN_STATES = [
	'draft',
	'frozen',
	'in-review',
	'returned',
	'approved',
	'signed-off',
	'superseded'
] as const;
export type PlanState = (typeof PLAN_STATES)[number];

export const REVISION_STATES = [
	'frozen',
	'in-review',
	'returned',
	'approved',
	'signed-off',
	'superseded'
] as const satisfies readonly PlanState[];
export type RevisionState = (typeof REVISION_STATES)[number];

interface MoveRule {
	readonly from: readonly PlanState[];
	readonly to: RevisionState;
	/** Who may make it; null where it only follows from the decision about a newer revision. */
	readonly right: Action | null;
	/** It says why. */
	readonly needsNote: boolean;
}

/**
 * The moves that there are: the one table that pages, server and tests read. A state that no move
 * leads to from the present one cannot be reached.
 */
export const REVISION_MOVES = {
	freeze: { from: ['draft'], to: 'frozen', right: 'revision.freeze', needsNote: false },
	/** Asks for review; of a returned revision once more, with what has been settled since. */
	ask: {
		from: ['frozen', 'returned'],
		to: 'in-review',
		right: 'revision.freeze',
		needsNote: false
	},
	return: { from: ['in-review'], to: 'returned', right: 'revision.decide', needsNote: true },
	approve: { from: ['in-review'], to: 'approved', right: 'revision.decide', needsNote: false },
	'sign-off': { from: ['approved'], to: 'signed-off', right: 'revision.decide', needsNote: false },
	/** A newer revision was approved, or where this one is signed off, the newer one was signed off. */
	supersede: {
		from: ['frozen', 'in-review', 'returned', 'approved', 'signed-off'],
		to: 'superseded',
		right: null,
		needsNote: true
	}
} as const satisfies Record<string, MoveRule>;
export type RevisionMove = keyof typeof REVISION_MOVES;

/** The move that leads from one state to another, or null where there is none. */
export function moveBetween(from: PlanState, to: PlanState): RevisionMove | null {
	for (const [move, rule] of Object.entries(REVISION_MOVES)) {
		const froms: readonly PlanState[] = rule.from;
		if (rule.to === to && froms.includes(from)) return move as RevisionMove;
	}
	return null;
}

/** Whether a move can be made from a state. */
export function canMove(state: PlanState, move: RevisionMove): boolean {
	const froms: readonly PlanState[] = REVISION_MOVES[move].from;
	return froms.includes(state);
}

export const noteSchema = z.string().trim().max(4000, 'At most 4000 characters');

export const freezeSchema = z.strictObject({
	/** Version of the draft that its freezer saw. */
	baseVersion: z.int().nonnegative(),
	title: z.string().trim().max(120, 'At most 120 characters').default(''),
	note: noteSchema.default('')
});
export type Freeze = z.input<typeof freezeSchema>;

export const askReviewSchema = z.strictObject({
	/** What to look at. */
	note: noteSchema.default('')
});
export type AskReview = z.input<typeof askReviewSchema>;

export const decideSchema = z.strictObject({
	decision: z.enum(['approve', 'return']),
	/** Hash of what was looked at: the decision is about nothing else. */
	hash: z.string().regex(/^[0-9a-f]{64}$/, 'expected the hash of the revision'),
	/** Why; a return says what is asked. */
	note: noteSchema.default('')
});
export type Decide = z.input<typeof decideSchema>;

/** Starts the draft anew from a revision. */
export const restoreSchema = z.strictObject({
	/** Version of the draft that is replaced. */
	baseVersion: z.int().nonnegative()
});
export type Restore = z.infer<typeof restoreSchema>;

export const personSchema = z.object({ id: z.uuid(), name: z.string() });
export type PersonName = z.infer<typeof personSchema>;

const atSchema = z.iso.datetime({ offset: true });

/** One line of a revision's history. */
export const revisionMoveSchema = z.object({
	from: z.enum(PLAN_STATES),
	to: z.enum(REVISION_STATES),
	by: personSchema,
	at: atSchema,
	note: z.string(),
	/** Hash of the content that the move is about. */
	hash: z.string()
});
export type RevisionMoveRecord = z.infer<typeof revisionMoveSchema>;

/** A revision at a glance. */
export const revisionSummarySchema = z.object({
	id: z.uuid(),
	floorplanId: z.uuid(),
	/** Counts from 1 within its floorplan. */
	number: z.int(),
	/** Empty where nobody gave one. */
	title: z.string(),
	note: z.string(),
	hash: z.string(),
	/** Version of the draft that it froze. */
	draftVersion: z.int(),
	frozenBy: personSchema,
	frozenAt: atSchema,
	state: z.enum(REVISION_STATES),
	/** The move that led to its state. */
	lastMove: revisionMoveSchema,
	reading: z.object({
		/** Modes and corners with a result, of how many. */
		solved: z.int(),
		combinations: z.int(),
		/** Null without any result; the margin also where nothing is limited. */
		worstDropV: z.number().nullable(),
		worstMarginV: z.number().nullable(),
		/** Findings over the results that there are. */
		findings: z.int()
	}),
	openThreads: z.int()
});
export type RevisionSummary = z.infer<typeof revisionSummarySchema>;

export const revisionListSchema = z.object({
	/** The newest first. */
	revisions: z.array(revisionSummarySchema)
});

/** How far the result of one mode and corner is. */
export const RESULT_STATES = ['complete', 'under-way', 'failed', 'missing'] as const;
export const revisionResultSchema = z.object({
	mode: z.string(),
	corner: z.string(),
	/** Missing: neither kept nor under way, for example because its job was cancelled. */
	state: z.enum(RESULT_STATES),
	resultId: z.uuid().nullable(),
	worstDropV: z.number().nullable(),
	worstMarginV: z.number().nullable(),
	findings: z.int().nullable(),
	/** The newest job of a result that is not complete. */
	job: jobSchema.nullable()
});
export type RevisionResult = z.infer<typeof revisionResultSchema>;

/** What stands against the approval of a revision. */
export const BLOCKER_CODES = [
	'not-in-review',
	'own-work',
	'results-missing',
	'results-failed',
	'findings-open'
] as const;
export const blockerSchema = z.object({ code: z.enum(BLOCKER_CODES), message: z.string() });
export type Blocker = z.infer<typeof blockerSchema>;

/**
 * A revision with its document. The server only ever stores parsed documents, so the page trusts
 * the shape instead of parsing hundreds of kilobytes again.
 */
export const revisionDetailSchema = revisionSummarySchema.extend({
	projectId: z.uuid(),
	projectName: z.string(),
	floorplanName: z.string(),
	document: z.custom<Floorplan>((value) => typeof value === 'object' && value !== null),
	/** Role of whoever reads it; `may` tells what it allows. */
	role: z.enum(PROJECT_ROLES).nullable(),
	/** In the order in which they were made; the first froze it. */
	moves: z.array(revisionMoveSchema),
	/** Every mode and corner, in the order of the document. */
	results: z.array(revisionResultSchema),
	/** Whose work it is: who froze it or edited the plan since the last approved revision. */
	authors: z.array(personSchema),
	/** What stands against an approval by whoever reads it; the server refuses as long as any does. */
	blockers: z.array(blockerSchema),
	/** The revision before and after it, for paging. */
	previous: z.object({ id: z.uuid(), number: z.int() }).nullable(),
	next: z.object({ id: z.uuid(), number: z.int() }).nullable()
});
export type RevisionDetail = z.infer<typeof revisionDetailSchema>;

export const FINDING_STATUSES = ['new', 'still-there', 'come-back', 'gone'] as const;
export type FindingStatus = (typeof FINDING_STATUSES)[number];

/** A finding of a revision. Its identity over revisions: kind, list, subject, partner, mode, corner. */
export const revisionFindingSchema = z.object({
	id: z.uuid(),
	kind: z.enum(FINDING_KINDS),
	list: z.enum(FINDING_LISTS),
	subject: z.string(),
	/** What else it is about where the subject alone does not tell: net of a via, other strap of a short. */
	partner: z.string().nullable(),
	mode: z.string(),
	corner: z.string(),
	value: z.number(),
	limit: z.number(),
	unit: z.enum(['V', 'A', 'um', '']),
	message: z.string(),
	atUm: z.tuple([z.number(), z.number()]).nullable(),
	/** Against the revision before; a gone one carries the figures that it had there. */
	status: z.enum(FINDING_STATUSES),
	/** Of a finding that is still there: the figure before. Of one that came back: where it was last. */
	before: z.object({ number: z.int(), value: z.number(), limit: z.number() }).nullable()
});
export type RevisionFinding = z.infer<typeof revisionFindingSchema>;

export const revisionFindingsSchema = z.object({
	/** Number of the revision compared with; null for the first, whose findings are all new. */
	against: z.int().nullable(),
	/** Whether every mode and corner has its result: else there may be more. */
	isComplete: z.boolean(),
	findings: z.array(revisionFindingSchema)
});
export type RevisionFindings = z.infer<typeof revisionFindingsSchema>;
