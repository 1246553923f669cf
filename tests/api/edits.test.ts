/** Edits over HTTP: exactly once, in order, merged where they can be, told apart where they cannot. */
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import {
	ApiError,
	conflictSchema,
	createClient,
	type ApiClient,
	type EditConflict,
	type SubmitEdit
} from '#lib/contracts/index.ts';
import { applyOperations, type Operation } from '#lib/floorplan/edits/index.ts';
import { floorplanSchema, hashFloorplan } from '#lib/floorplan/index.ts';
import { connect, type Connection } from '#lib/server/db/client.ts';
import { insertFloorplan } from '#lib/server/services/floorplans.ts';
import { startApiServer, type ApiServer } from '../support/api-server.ts';
import { createTestDatabase, type TestDatabase } from '../support/database.ts';
import { makeWorld, smallPlan, type World } from '../support/people.ts';

let database: TestDatabase;
let connection: Connection;
let server: ApiServer;
let world: World;
let placer: ApiClient;
let lead: ApiClient;
let floorplanId: string;

const plan = smallPlan();

beforeAll(async () => {
	database = await createTestDatabase();
	connection = connect(database.url, 4);
	server = await startApiServer(database.url);
	world = await makeWorld(connection.db, plan);
	placer = createClient(server.as(world.members.placer.token));
	lead = createClient(server.as(world.members.lead.token));
});

beforeEach(async () => {
	const { actor } = world.members.placer;
	floorplanId = await insertFloorplan(connection.db, actor, world.projectId, plan);
});

afterAll(async () => {
	await server.close();
	await connection.sql.end();
	await database.drop();
});

function edit(baseVersion: number, ...operations: Operation[]): SubmitEdit {
	return { id: crypto.randomUUID(), label: 'Test', baseVersion, operations };
}

function keepout(id: string): Operation {
	const item = { id, outline: plan.die.outline, forbids: ['regulators'] };
	return { op: 'insert', list: 'keepouts', index: 1000, item };
}

function move(id: string, from: number, to: number): Operation {
	return { op: 'change', list: 'regulators', id, field: 'xUm', from, to };
}

async function problemOf(work: Promise<unknown>): Promise<ApiError['problem']> {
	const error = await work.then(
		() => null,
		(reason: unknown) => reason
	);
	if (!(error instanceof ApiError)) throw new Error(`not refused: ${String(error)}`);
	return error.problem;
}

function conflictsOf(problem: ApiError['problem']): EditConflict[] {
	return conflictSchema.array().parse(problem.conflicts);
}

describe('twenty clients at once', () => {
	it('take each edit once: versions without a gap, nothing lost, nothing twice', async () => {
		const clients = Array.from({ length: 20 }, (_, i) => (i % 2 === 0 ? placer : lead));
		await Promise.all(
			clients.map(async (client, i) => {
				for (let round = 0; round < 3; round++) {
					const wanted = edit(1, keepout(`k${i}.${round}`));
					// Sent twice at the same time, and again afterwards, as after a lost answer.
					const [first, twin] = await Promise.all([
						client.submitEdit(floorplanId, wanted),
						client.submitEdit(floorplanId, wanted)
					]);
					const again = await client.submitEdit(floorplanId, wanted);
					expect(twin).toEqual(first);
					expect(again).toEqual(first);
				}
			})
		);
		const { version, document, hash } = await placer.getFloorplan(floorplanId);
		expect(version).toBe(61);
		const ids = document.keepouts.map(({ id }) => id);
		expect(new Set(ids).size).toBe(60);
		expect(ids).toHaveLength(60);
		const { edits } = await placer.listEdits(floorplanId, 1);
		expect(edits.map((one) => one.version)).toEqual(Array.from({ length: 60 }, (_, i) => i + 2));

		// The history gives the document again, and its hash at every version.
		const replayed = edits.reduce((present, { operations }) => {
			const result = applyOperations(present, operations);
			if (result.status !== 'applied') throw new Error(result.status);
			return result.floorplan;
		}, plan);
		expect(hashFloorplan(replayed)).toBe(hash);
		expect(hashFloorplan(floorplanSchema.parse(document))).toBe(hash);
	});

	it('of one field: one wins, nineteen are told of the conflict', async () => {
		const { xUm } = plan.regulators[0];
		const answers = await Promise.allSettled(
			Array.from({ length: 20 }, (_, i) =>
				(i % 2 === 0 ? placer : lead).submitEdit(floorplanId, edit(1, move('r1', xUm, xUm + i + 1)))
			)
		);
		expect(answers.filter(({ status }) => status === 'fulfilled')).toHaveLength(1);
		const refusals = answers.flatMap((answer) =>
			answer.status === 'rejected' ? [(answer.reason as ApiError).problem.status] : []
		);
		expect(refusals).toEqual(Array.from({ length: 19 }, () => 409));
		expect((await placer.getFloorplan(floorplanId)).version).toBe(2);
	});
});

describe('two people', () => {
	it('merge where they touch different things', async () => {
		const { regulators } = plan;
		await placer.submitEdit(floorplanId, edit(1, move('r1', regulators[0].xUm, 3)));
		await lead.submitEdit(floorplanId, edit(1, move('r2', regulators[1].xUm, 5)));
		const { document, version } = await placer.getFloorplan(floorplanId);
		expect(version).toBe(3);
		expect(document.regulators.map(({ xUm }) => xUm)).toEqual([3, 5]);
	});

	it('merge where they touch different fields of one thing', async () => {
		const [{ xUm, yUm }] = plan.regulators;
		await placer.submitEdit(floorplanId, edit(1, move('r1', xUm, 3)));
		await lead.submitEdit(
			floorplanId,
			edit(1, { op: 'change', list: 'regulators', id: 'r1', field: 'yUm', from: yUm, to: 7 })
		);
		const { document } = await placer.getFloorplan(floorplanId);
		expect(document.regulators[0]).toMatchObject({ xUm: 3, yUm: 7 });
	});

	it('are shown both values, and who changed it when, where they touch the same field', async () => {
		const [{ xUm }] = plan.regulators;
		await placer.submitEdit(floorplanId, edit(1, move('r1', xUm, 3)));
		const problem = await problemOf(
			lead.submitEdit(floorplanId, edit(1, move('r1', xUm, 5), keepout('k1')))
		);
		expect(problem).toMatchObject({ status: 409, version: 2 });
		const [conflict] = conflictsOf(problem);
		expect(conflict).toMatchObject({
			operation: 0,
			list: 'regulators',
			id: 'r1',
			field: 'xUm',
			mine: 5,
			theirs: 3,
			reason: 'changed',
			by: 'placer'
		});
		expect(conflict.at).toMatch(/^\d{4}-\d\d-\d\dT.*Z$/);
		// All or nothing: the keep-out of the same edit is not there either.
		const { document } = await placer.getFloorplan(floorplanId);
		expect(document.keepouts).toEqual([]);
	});

	it('are told when the thing is gone, and by whom', async () => {
		await placer.submitEdit(
			floorplanId,
			edit(1, { op: 'remove', list: 'regulators', index: 0, item: plan.regulators[0] })
		);
		const problem = await problemOf(
			lead.submitEdit(floorplanId, edit(1, move('r1', plan.regulators[0].xUm, 5)))
		);
		expect(conflictsOf(problem)).toMatchObject([{ id: 'r1', reason: 'gone', by: 'placer' }]);
	});

	it('are told when an id is taken', async () => {
		await placer.submitEdit(floorplanId, edit(1, keepout('k1')));
		const problem = await problemOf(lead.submitEdit(floorplanId, edit(1, keepout('k1'))));
		expect(conflictsOf(problem)).toMatchObject([{ id: 'k1', reason: 'taken', by: 'placer' }]);
	});
});

describe('an edit', () => {
	it('sent again long afterwards answers with the version and hash that it made', async () => {
		const first = edit(1, keepout('k1'));
		const accepted = await placer.submitEdit(floorplanId, first);
		await lead.submitEdit(floorplanId, edit(2, keepout('k2')));
		expect(await placer.submitEdit(floorplanId, first)).toEqual(accepted);
		expect((await placer.getFloorplan(floorplanId)).version).toBe(3);
	});

	it('does not pass for one of somebody else', async () => {
		const first = edit(1, keepout('k1'));
		await placer.submitEdit(floorplanId, first);
		const problem = await problemOf(lead.submitEdit(floorplanId, first));
		expect(problem).toMatchObject({ status: 422 });
		expect(problem.detail).toContain('id: another edit has this id');
	});

	it('may have an id that another floorplan knows', async () => {
		const { actor } = world.members.placer;
		const other = await insertFloorplan(connection.db, actor, world.projectId, plan);
		const first = edit(1, keepout('k1'));
		await placer.submitEdit(floorplanId, first);
		await placer.submitEdit(other, first);
		expect((await placer.getFloorplan(other)).version).toBe(2);
	});

	it('that breaks a rule of the document is refused with its place', async () => {
		const problem = await problemOf(
			placer.submitEdit(
				floorplanId,
				edit(1, {
					op: 'change',
					list: 'cells',
					id: 'unit',
					field: 'maxA',
					from: plan.cells[0].maxA,
					to: -1
				})
			)
		);
		expect(problem.status).toBe(422);
		expect(problem.errors?.[0].path).toContain('unit');
		expect((await placer.getFloorplan(floorplanId)).version).toBe(1);
	});

	it('of a version that does not exist yet is refused', async () => {
		const problem = await problemOf(placer.submitEdit(floorplanId, edit(7, keepout('k1'))));
		expect(problem.detail).toContain('Version 7 does not exist yet (newest is 1)');
	});
});

describe('the history', () => {
	it('comes in pages', async () => {
		// Written at once: a request for each would take the test's time for nothing.
		await connection.sql`
			insert into floorplan_edits
				(floorplan_id, edit_id, label, operations, base_version, to_version, to_hash, user_id)
			select ${floorplanId}, gen_random_uuid(), 'Test', ${JSON.stringify([keepout('k')])}::jsonb,
				version - 1, version, '', ${world.members.placer.actor.userId}
			from generate_series(2, 206) as version`;
		const first = await placer.listEdits(floorplanId, 1);
		expect(first).toMatchObject({ version: 201, hasMore: true });
		const second = await placer.listEdits(floorplanId, first.version);
		expect(second).toMatchObject({ version: 206, hasMore: false });
		expect(second.edits).toHaveLength(5);
		expect(await placer.listEdits(floorplanId, 206)).toEqual({
			edits: [],
			version: 206,
			hasMore: false
		});
	});

	it.each(['-1', 'x', '1.5'])('refuses a version of %s', async (after) => {
		const response = await server.as(world.members.placer.token)(
			`/api/v1/floorplans/${floorplanId}/edits?after=${after}`
		);
		expect(response.status).toBe(422);
	});
});
