import { randomUUID } from 'node:crypto';
import type { ProjectRole } from '#lib/contracts/index.ts';
import type { DemoHistory, DemoStep } from '#lib/demo/index.ts';
import { hashFloorplan, type Floorplan } from '#lib/floorplan/index.ts';
import type { Actor } from '../audit.ts';
import type { Handle } from '../db/client.ts';
import { keepResult } from '../jobs/solve-kind.ts';
import type { SolveAnswer, SolveRequest } from '../jobs/solve-messages.ts';
import { draftTalk, revisionTalk, type DemoThread } from './demo-talk.ts';
import { submitEdit } from './edits.ts';
import { insertFloorplan } from './floorplans.ts';
import { askReview, decide } from './review.ts';
import { combinationsOf } from './revision-results.ts';
import { freeze } from './revisions.ts';
import { addComment, openThread, settleThread, type ThreadSubject } from './threads.ts';

const HOUR_MS = 3_600_000;

export type DemoSolve = (request: SolveRequest) => Promise<SolveAnswer>;
export type DemoCast = Readonly<Record<ProjectRole, Actor>>;

interface DemoStory {
	readonly history: DemoHistory;
	/** Results of the first and the second plan, in every mode and corner. */
	readonly first: readonly SolveAnswer[];
	readonly second: readonly SolveAnswer[];
}

/** Solves a plan in every mode and corner. */
export async function solveAll(solve: DemoSolve, floorplan: Floorplan): Promise<SolveAnswer[]> {
	const documentHash = hashFloorplan(floorplan);
	const answers: SolveAnswer[] = [];
	for (const { mode, corner } of combinationsOf(floorplan)) {
		answers.push(await solve({ floorplan, documentHash, mode, corner }));
	}
	return answers;
}

/**
 * Tells how the demo's floorplan came about, through the same services that people use: a first
 * revision that a lead approved, a second that was returned with threads, and the draft that answers
 * it. Returns the floorplan's id.
 *
 * @param now when it is told; everything happened in the days before
 */
export async function tellDemoStory(
	tx: Handle,
	cast: DemoCast,
	projectId: string,
	{ history, first, second }: DemoStory,
	now: Date
): Promise<string> {
	const before = (hours: number) => new Date(now.getTime() - hours * HOUR_MS);
	const floorplanId = await insertFloorplan(tx, cast.placer, projectId, history.first, before(213));
	let version = 1;
	const make = async ({ by, edit }: DemoStep, hours: number) => {
		const submitted = { ...edit, id: randomUUID(), baseVersion: version };
		({ version } = await submitEdit(tx, cast[by], floorplanId, submitted, before(hours)));
	};
	const keep = async (answers: readonly SolveAnswer[]) => {
		for (const answer of answers) {
			const { mode, corner, floorplan } = answer.file;
			const input = { projectId, floorplanId, documentHash: floorplan.sha256, mode, corner };
			await keepResult(tx, input, answer);
		}
	};

	await keep(first);
	const one = await freeze(
		tx,
		cast.placer,
		floorplanId,
		{
			baseVersion: version,
			title: 'First grid',
			note: 'Straps, bumps and 96 regulators on the first estimate of the currents.'
		},
		before(190)
	);
	await askReview(
		tx,
		cast.placer,
		one.id,
		{ note: 'Is the grid good enough to go on with?' },
		before(189)
	);
	await decide(
		tx,
		cast.lead,
		one.id,
		{
			decision: 'approve',
			hash: one.hash,
			note: 'Every limit holds in all modes and corners, on estimated currents. Go on, and bring measured ones.'
		},
		before(167)
	);

	for (const [index, step] of history.toSecond.entries()) await make(step, 98 - 2 * index);
	await keep(second);
	const two = await freeze(
		tx,
		cast.placer,
		floorplanId,
		{
			baseVersion: version,
			title: 'Simulated currents, low battery',
			note: 'Block currents from simulation, burst on a low battery, regulators trimmed.'
		},
		before(74)
	);
	await askReview(
		tx,
		cast.placer,
		two.id,
		{ note: 'Burst breaks limits now. Which of them do we mend by placement?' },
		before(73)
	);
	const subject = { kind: 'revision', id: two.id } as const;
	const talk = revisionTalk(
		history.second,
		second.map(({ file }) => file)
	);
	for (const thread of talk) await write(tx, cast, subject, thread, before);
	await decide(
		tx,
		cast.lead,
		two.id,
		{
			decision: 'return',
			hash: two.hash,
			note: 'Bring the core rail back under its drop limit in burst, and settle the headroom beside the sensor window. The threads say where.'
		},
		before(49)
	);

	for (const [index, step] of history.toDraft.entries()) await make(step, 26 - index);
	const draft = { kind: 'floorplan', id: floorplanId } as const;
	for (const thread of draftTalk) await write(tx, cast, draft, thread, before);
	return floorplanId;
}

/** Writes one thread with its answers, each at its time. */
async function write(
	tx: Handle,
	cast: DemoCast,
	subject: ThreadSubject,
	{ anchor, comments, resolved }: DemoThread,
	before: (hours: number) => Date
): Promise<void> {
	const [opening, ...answers] = comments;
	const { id } = await openThread(
		tx,
		cast[opening.by],
		subject,
		{ anchor, text: opening.text },
		before(opening.hours)
	);
	for (const { by, text, hours } of answers) {
		await addComment(tx, cast[by], id, text, before(hours));
	}
	if (resolved) await settleThread(tx, cast[resolved.by], id, 'resolve', before(resolved.hours));
}
