/** Revisions over HTTP: frozen for good, bound to their results, decided by those who may. */
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import {
	ApiError,
	createClient,
	floorplanEventSchema,
	type ApiClient,
	type RevisionDetail
} from '#lib/contracts/index.ts';
import type { Operation } from '#lib/floorplan/edits/index.ts';
import { hashFloorplan, type Floorplan } from '#lib/floorplan/index.ts';
import { connect, type Connection } from '#lib/server/db/client.ts';
import { insertFloorplan } from '#lib/server/services/floorplans.ts';
import { startApiServer, type ApiServer } from '../support/api-server.ts';
import { createTestDatabase, type TestDatabase } from '../support/database.ts';
import { readEvents } from '../support/event-stream.ts';
import { addPerson, makeWorld, smallPlan, type World } from '../support/people.ts';
import { solveAndKeep } from '../support/solve-and-keep.ts';

let database: TestDatabase;
let connection: Connection;
let server: ApiServer;
let world: World;
let placer: ApiClient;
let analyst: ApiClient;
let lead: ApiClient;
let floorplanId: string;

/** Two modes, one corner, no limit that it could break. */
const plan = smallPlan();

beforeAll(async () => {
	database = await createTestDatabase();
	connection = connect(database.url, 6);
	server = await startApiServer(database.url);
});

beforeEach(async () => {
	world = await makeWorld(connection.db, plan);
	({ floorplanId } = world);
	placer = createClient(server.as(world.members.placer.token));
	analyst = createClient(server.as(world.members.analyst.token));
	lead = createClient(server.as(world.members.lead.token));
});

afterAll(async () => {
	await server.close();
	await connection.sql.end();
	await database.drop();
});

/** The problem with which an act is refused. */
async function refusal(act: Promise<unknown>) {
	const error: unknown = await act.then(
		() => null,
		(reason: unknown) => reason
	);
	if (error instanceof ApiError) return error.problem;
	throw new Error(`not refused: ${String(error)}`);
}

async function draftOf(id = floorplanId): Promise<{ version: number; document: Floorplan }> {
	return lead.getFloorplan(id);
}

async function change(by: ApiClient, ...operations: Operation[]): Promise<number> {
	const { version } = await draftOf();
	const edit = { id: crypto.randomUUID(), label: 'Test', baseVersion: version, operations };
	return (await by.submitEdit(floorplanId, edit)).version;
}

function naming(id: string, from: string | undefined, to: string): Operation {
	return { op: 'change', list: 'blocks', id, field: 'name', from, to };
}

/** Sets the limit of drop; 1 uV is always broken, 1 V never. */
async function limitDrop(by: ApiClient, dropV: number): Promise<void> {
	const { limits } = (await draftOf()).document;
	await change(by, { op: 'set', property: 'limits', from: limits, to: { ...limits, dropV } });
}

async function freezeDraft(by: ApiClient = placer): Promise<RevisionDetail> {
	return by.freezeRevision(floorplanId, { baseVersion: (await draftOf()).version });
}

/** Keeps every result of a document, as the worker would. */
async function solveAll(document: Floorplan): Promise<void> {
	for (const { id: mode } of document.modes) {
		await solveAndKeep(connection, world, document, { mode });
	}
}

/** The draft solved and frozen, its review asked for. */
async function inReview(): Promise<RevisionDetail> {
	await solveAll((await draftOf()).document);
	const { id } = await freezeDraft();
	return placer.askReview(id, {});
}

function approve(by: ApiClient, { id, hash }: RevisionDetail): Promise<RevisionDetail> {
	return by.decideRevision(id, { decision: 'approve', hash });
}

async function secondLead(): Promise<ApiClient> {
	const { token, actor } = await addPerson(connection.db, world.teamId, 'lead2');
	await lead.setMember(world.projectId, actor.userId, 'lead');
	return createClient(server.as(token));
}

describe('freezing', () => {
	it('keeps the whole document under the next number, whatever becomes of the draft', async () => {
		const first = await placer.freezeRevision(floorplanId, {
			baseVersion: 1,
			title: 'First',
			note: 'As drawn.'
		});
		expect(first).toMatchObject({
			number: 1,
			title: 'First',
			note: 'As drawn.',
			state: 'frozen',
			hash: hashFloorplan(plan),
			frozenBy: { name: 'placer' }
		});
		await change(placer, naming('b1', undefined, 'CPU'));
		const second = await freezeDraft();
		expect(second.number).toBe(2);
		const again = await placer.getRevision(first.id);
		expect(hashFloorplan(again.document)).toBe(first.hash);
		expect(again.document.blocks[0].name).toBeUndefined();
		expect(second.document.blocks[0].name).toBe('CPU');
		expect([again.previous, again.next?.number]).toEqual([null, 2]);
		const listed = await placer.listRevisions(floorplanId);
		expect(listed.map(({ number }) => number)).toEqual([2, 1]);
	});

	it('is refused where the draft has moved on', async () => {
		await change(analyst, naming('b1', undefined, 'CPU'));
		const problem = await refusal(placer.freezeRevision(floorplanId, { baseVersion: 1 }));
		expect(problem).toMatchObject({ status: 409, version: 2 });
		expect(problem.detail).toContain('version 2');
		expect(await placer.listRevisions(floorplanId)).toEqual([]);
	});

	it('of one version by ten at once is one revision', async () => {
		const frozen = await Promise.all(
			Array.from({ length: 10 }, () => placer.freezeRevision(floorplanId, { baseVersion: 1 }))
		);
		expect(new Set(frozen.map(({ id }) => id)).size).toBe(1);
		expect(await placer.listRevisions(floorplanId)).toHaveLength(1);
		expect(frozen[0].moves).toHaveLength(1);
	});

	it.each(['number', 'state', 'frozenBy', 'hash', 'document'])(
		'refuses a field %s that is not its sender’s to set',
		async (field) => {
			const response = await server.as(world.members.placer.token)(
				`/api/v1/floorplans/${floorplanId}/revisions`,
				{
					method: 'POST',
					headers: { 'content-type': 'application/json' },
					body: JSON.stringify({ baseVersion: 1, [field]: 'x' })
				}
			);
			expect(response.status).toBe(422);
		}
	);

	it('tells the pages of the floorplan, and is on the audit trail', async () => {
		const path = `/api/v1/floorplans/${floorplanId}/events`;
		const events = await readEvents(server.as(world.members.viewer.token), path);
		await events.next('ready');
		const { id } = await freezeDraft();
		const event = floorplanEventSchema.parse(await events.next('revision'));
		expect(event).toEqual({ type: 'revision', id, number: 1, state: 'frozen' });
		events.close();
		const trail = await connection.sql`
			select action from audit_events where object_kind = 'revision' and object_id = ${id}`;
		expect(trail.map(({ action }) => action as string)).toEqual(['revision.freeze']);
	});
});

describe('the results of a revision', () => {
	it('that are kept already belong to it at once; the rest is started', async () => {
		const resultId = await solveAndKeep(connection, world, plan, { mode: 'default' });
		const { results, reading } = await freezeDraft();
		expect(results.map(({ mode, state }) => `${mode} ${state}`)).toEqual([
			'default complete',
			'busy under-way'
		]);
		expect(results[0].resultId).toBe(resultId);
		expect(results[1].job).toMatchObject({ state: 'queued', mode: 'busy' });
		expect(reading).toMatchObject({ solved: 1, combinations: 2 });
	});

	it('that come later belong to it, though the draft has gone on', async () => {
		const { id } = await freezeDraft();
		await change(placer, naming('b1', undefined, 'CPU'));
		await placer.requestSolves(floorplanId, {});
		const waiting = await placer.getRevision(id);
		expect(waiting.results.map(({ state }) => state)).toEqual(['under-way', 'under-way']);
		await solveAll(plan);
		const { results } = await placer.getRevision(id);
		expect(results.map(({ state }) => state)).toEqual(['complete', 'complete']);
	});

	it('are bound whichever of freezing and keeping comes first, also at the same time', async () => {
		await Promise.all([freezeDraft(), solveAll(plan)]);
		const [{ reading }] = await placer.listRevisions(floorplanId);
		expect(reading.solved).toBe(2);
	});

	it('are the same for another floorplan of the project with the same content', async () => {
		await solveAll(plan);
		const { actor } = world.members.placer;
		const other = await insertFloorplan(connection.db, actor, world.projectId, plan);
		const { reading } = await placer.freezeRevision(other, { baseVersion: 1 });
		expect(reading.solved).toBe(2);
	});

	it('are started again where they failed or were cancelled', async () => {
		const { id, results } = await freezeDraft();
		await analyst.cancelJob(results[0].job?.id ?? '');
		await connection.sql`
			update jobs set state = 'failed', failure = '{"message":"No.","problems":[]}'
			where id = ${results[1].job?.id ?? ''}`;
		const stopped = await placer.getRevision(id);
		expect(stopped.results.map(({ state }) => state)).toEqual(['missing', 'failed']);
		expect(stopped.blockers.map(({ code }) => code)).toEqual([
			'not-in-review',
			'own-work',
			'results-failed',
			'results-missing'
		]);
		const started = await analyst.solveRevision(id);
		expect(started.results.map(({ state }) => state)).toEqual(['under-way', 'under-way']);
	});
});

describe('review', () => {
	it('leads from frozen over in review to approved, each move with who, when, why and on what', async () => {
		await solveAll(plan);
		const { id, hash } = await freezeDraft();
		await placer.askReview(id, { note: 'Look at the corners.' });
		const approved = await lead.decideRevision(id, { decision: 'approve', hash, note: 'Fine.' });
		expect(approved.state).toBe('approved');
		expect(
			approved.moves.map(({ from, to, by, note }) => [from, to, by.name, note].join(' | '))
		).toEqual([
			'draft | frozen | placer | ',
			'frozen | in-review | placer | Look at the corners.',
			'in-review | approved | lead | Fine.'
		]);
		expect(new Set(approved.moves.map((move) => move.hash))).toEqual(new Set([hash]));
	});

	it('may be asked for again after a return', async () => {
		const { id, hash } = await inReview();
		await lead.decideRevision(id, { decision: 'return', hash, note: 'Why this cell?' });
		const asked = await placer.askReview(id, { note: 'Answered in the thread.' });
		expect(asked.state).toBe('in-review');
		expect((await approve(lead, asked)).state).toBe('approved');
	});

	it('takes earlier revisions out of use when a newer one is approved', async () => {
		const first = await inReview();
		await approve(lead, first);
		await change(placer, naming('b1', undefined, 'CPU'));
		const second = await freezeDraft();
		await change(placer, naming('b1', 'CPU', 'Core'));
		await approve(lead, await inReview());
		const states = (await placer.listRevisions(floorplanId)).map(({ state }) => state);
		expect(states).toEqual(['approved', 'superseded', 'superseded']);
		const { lastMove } = await placer.getRevision(second.id);
		expect(lastMove).toMatchObject({ note: 'Revision 3 was approved.', by: { name: 'lead' } });
	});

	it('leaves a revision that was signed off in force when a newer one is approved', async () => {
		const first = await inReview();
		await approve(lead, first);
		await connection.sql`
			insert into revision_moves (revision_id, position, from_state, to_state, hash, note, user_id)
			values (${first.id}, 4, 'approved', 'signed-off', ${first.hash}, '', ${world.members.lead.actor.userId})`;
		await change(placer, naming('b1', undefined, 'CPU'));
		await approve(lead, await inReview());
		const states = (await placer.listRevisions(floorplanId)).map(({ state }) => state);
		expect(states).toEqual(['approved', 'signed-off']);
	});
});

describe('UX-55: from each state', () => {
	const asks = ['ask', 'approve', 'return'] as const;
	/** Moves that a person can ask for; written out by hand. */
	const ALLOWED: Readonly<Record<string, readonly string[]>> = {
		frozen: ['ask'],
		'in-review': ['approve', 'return'],
		returned: ['ask'],
		approved: [],
		'signed-off': [],
		superseded: []
	};
	const pairs = Object.keys(ALLOWED).flatMap((state) => asks.map((move) => ({ state, move })));

	it.each(pairs)('$state, $move', async ({ state, move }) => {
		await solveAll(plan);
		const { id, hash } = await freezeDraft();
		if (state !== 'frozen') {
			await connection.sql`
				insert into revision_moves (revision_id, position, from_state, to_state, hash, note, user_id)
				values (${id}, 2, 'frozen', ${state}, ${hash}, '', ${world.members.lead.actor.userId})`;
		}
		const act =
			move === 'ask'
				? placer.askReview(id, {})
				: lead.decideRevision(id, { decision: move, hash, note: 'So.' });
		if (ALLOWED[state].includes(move)) {
			expect((await act).moves.at(-1)?.from).toBe(state);
			return;
		}
		expect(await refusal(act)).toMatchObject({ status: 409, state });
		expect((await placer.getRevision(id)).state).toBe(state);
	});
});

describe('a decision is refused', () => {
	it('on other content than was looked at (UX-56)', async () => {
		const { id } = await inReview();
		const hash = 'f'.repeat(64);
		const problem = await refusal(lead.decideRevision(id, { decision: 'approve', hash }));
		expect(problem.status).toBe(409);
		expect(problem.errors).toEqual([{ path: 'hash', message: expect.any(String) }]);
	});

	it('without a note where it returns', async () => {
		const { id, hash } = await inReview();
		const problem = await refusal(lead.decideRevision(id, { decision: 'return', hash, note: ' ' }));
		expect(problem).toMatchObject({ status: 422, errors: [{ path: 'note' }] });
	});

	it('while a result is missing (UX-49)', async () => {
		const { id, hash } = await freezeDraft();
		await placer.askReview(id, {});
		const problem = await refusal(lead.decideRevision(id, { decision: 'approve', hash }));
		expect(problem).toMatchObject({ status: 409, blockers: [{ code: 'results-missing' }] });
		expect(problem.detail).toContain('2 of 2 modes and corners');
		const returned = await lead.decideRevision(id, { decision: 'return', hash, note: 'Solve it.' });
		expect(returned.state).toBe('returned');
	});

	it('while a result failed', async () => {
		const { id, hash } = await freezeDraft();
		await connection.sql`
			update jobs set state = 'failed', failure = '{"message":"No.","problems":[]}'
			where floorplan_id = ${floorplanId}`;
		await placer.askReview(id, {});
		const problem = await refusal(lead.decideRevision(id, { decision: 'approve', hash }));
		expect(problem).toMatchObject({ status: 409, blockers: [{ code: 'results-failed' }] });
	});

	it('while a finding is open, but may return', async () => {
		await limitDrop(placer, 1e-6);
		const revision = await inReview();
		const problem = await refusal(approve(lead, revision));
		expect(problem).toMatchObject({ status: 409, blockers: [{ code: 'findings-open' }] });
		expect(problem.detail).toContain(`${revision.reading.findings} findings`);
	});

	it('to those who froze it (UX-57)', async () => {
		await solveAll(plan);
		const other = await secondLead();
		const { id } = await freezeDraft(other);
		const asked = await other.askReview(id, {});
		expect(asked.blockers.map(({ code }) => code)).toEqual(['own-work']);
		for (const decision of ['approve', 'return'] as const) {
			const act = other.decideRevision(id, { decision, hash: asked.hash, note: 'Mine.' });
			expect(await refusal(act)).toMatchObject({ status: 403, blockers: [{ code: 'own-work' }] });
		}
		const refused = await connection.sql`
			select 1 from audit_events where object_id = ${id} and outcome = 'refused'`;
		expect(refused).toHaveLength(2);
		expect((await approve(lead, asked)).state).toBe('approved');
	});

	it('to those who edited the plan since the last approved revision, and only since (UX-57)', async () => {
		const other = await secondLead();
		await change(other, naming('b1', undefined, 'CPU'));
		const first = await inReview();
		expect((await refusal(approve(other, first))).status).toBe(403);
		await approve(lead, first);
		await change(placer, naming('b1', 'CPU', 'Core'));
		const second = await inReview();
		expect(second.authors.map(({ name }) => name)).toEqual(['placer']);
		expect((await approve(other, second)).state).toBe('approved');
	});

	it('to whoever added the floorplan, until a revision of it was approved', async () => {
		const { actor } = world.members.lead;
		floorplanId = await insertFloorplan(connection.db, actor, world.projectId, plan);
		const revision = await inReview();
		expect((await refusal(approve(lead, revision))).status).toBe(403);
		expect((await approve(await secondLead(), revision)).state).toBe('approved');
	});

	it('to a lead who is one no longer', async () => {
		const { token, actor } = await addPerson(connection.db, world.teamId, 'lead2');
		await lead.setMember(world.projectId, actor.userId, 'lead');
		const revision = await inReview();
		await lead.setMember(world.projectId, actor.userId, 'analyst');
		const problem = await refusal(approve(createClient(server.as(token)), revision));
		expect(problem.status).toBe(403);
	});

	it('nineteen times of twenty at once (SEC-29)', async () => {
		const revision = await inReview();
		const { id, hash } = revision;
		const outcomes = await Promise.allSettled(
			Array.from({ length: 20 }, (_, index) =>
				lead.decideRevision(
					id,
					index % 2 === 0
						? { decision: 'approve', hash }
						: { decision: 'return', hash, note: 'Not yet.' }
				)
			)
		);
		expect(outcomes.filter(({ status }) => status === 'fulfilled')).toHaveLength(1);
		for (const outcome of outcomes) {
			if (outcome.status === 'fulfilled') continue;
			const reason: unknown = outcome.reason;
			expect(reason instanceof ApiError && reason.problem.status).toBe(409);
		}
		expect((await lead.getRevision(id)).moves).toHaveLength(3);
	});
});

describe('findings', () => {
	it('are new, still there, gone and come back over the revisions', async () => {
		const states: string[][] = [];
		for (const dropV of [1e-6, 1e-6, 1, 1e-6]) {
			await limitDrop(placer, dropV);
			await change(
				placer,
				naming('b1', (await draftOf()).document.blocks[0].name, `CPU ${states.length}`)
			);
			const { id, reading } = await inReview();
			const { findings, isComplete, against } = await analyst.getFindings(id);
			expect(isComplete).toBe(true);
			expect(against).toBe(states.length === 0 ? null : states.length);
			expect(findings.filter(({ status }) => status !== 'gone')).toHaveLength(reading.findings);
			states.push([...new Set(findings.map(({ status }) => status))]);
		}
		expect(states).toEqual([['new'], ['still-there'], ['gone'], ['come-back']]);
	});

	it('carry figure, limit and place, and what they were before', async () => {
		await limitDrop(placer, 1e-6);
		await inReview();
		await limitDrop(placer, 2e-6);
		const { id } = await inReview();
		const { findings } = await analyst.getFindings(id);
		const block = findings.find(({ list, mode }) => list === 'blocks' && mode === 'busy');
		expect(block).toMatchObject({
			kind: 'drop',
			subject: 'b1',
			corner: 'nominal',
			limit: 2e-6,
			unit: 'V',
			before: { number: 1, limit: 1e-6, value: block?.value }
		});
		expect(block?.atUm).toHaveLength(2);
	});

	it('do not count as gone while their mode is not solved', async () => {
		await limitDrop(placer, 1e-6);
		await inReview();
		await change(placer, naming('b1', undefined, 'CPU'));
		const { document } = await draftOf();
		const { id } = await freezeDraft();
		await solveAndKeep(connection, world, document, { mode: 'default' });
		const { findings, isComplete } = await analyst.getFindings(id);
		expect(isComplete).toBe(false);
		expect(new Set(findings.map(({ mode, status }) => `${mode} ${status}`))).toEqual(
			new Set(['default still-there'])
		);
	});
});

describe('a draft started anew from a revision', () => {
	it('is the revision again, by one edit that can be undone', async () => {
		const revision = await freezeDraft();
		await change(placer, naming('b1', undefined, 'CPU'));
		const [unit] = plan.regulators;
		const version = await change(placer, {
			op: 'remove',
			list: 'regulators',
			index: 0,
			item: unit
		});
		const { edits: before } = await lead.listEdits(floorplanId, 0);
		const restored = await placer.restoreRevision(revision.id, { baseVersion: version });
		expect(restored).toEqual({ version: version + 1, hash: revision.hash });
		const { edits } = await lead.listEdits(floorplanId, 0);
		expect(edits.slice(0, before.length)).toEqual(before);
		expect(edits.at(-1)).toMatchObject({ label: 'Start anew from revision 1', by: 'placer' });
	});

	it('is refused where the draft has moved on', async () => {
		const { id } = await freezeDraft();
		await change(analyst, naming('b1', undefined, 'CPU'));
		const problem = await refusal(placer.restoreRevision(id, { baseVersion: 1 }));
		expect(problem).toMatchObject({ status: 409, version: 2 });
	});

	it('makes its starter an author of what follows', async () => {
		const { id } = await freezeDraft();
		await change(placer, naming('b1', undefined, 'CPU'));
		await lead.restoreRevision(id, { baseVersion: 2 });
		const second = await freezeDraft();
		expect(second.authors.map(({ name }) => name)).toEqual(['lead', 'placer']);
	});
});
