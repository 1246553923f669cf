/** Threads over HTTP: pinned, answered, settled, and there to stay. */
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import {
	ApiError,
	createClient,
	floorplanEventSchema,
	type ApiClient,
	type Thread
} from '#lib/contracts/index.ts';
import type { Item, Operation } from '#lib/floorplan/edits/index.ts';
import { connect, type Connection } from '#lib/server/db/client.ts';
import { startApiServer, type ApiServer } from '../support/api-server.ts';
import { createTestDatabase, type TestDatabase } from '../support/database.ts';
import { readEvents } from '../support/event-stream.ts';
import { makeWorld, smallPlan, type World } from '../support/people.ts';

let database: TestDatabase;
let connection: Connection;
let server: ApiServer;
let world: World;
let placer: ApiClient;
let lead: ApiClient;
let viewer: ApiClient;
let floorplanId: string;

const plan = smallPlan();
const [unit] = plan.regulators;

beforeAll(async () => {
	database = await createTestDatabase();
	connection = connect(database.url, 4);
	server = await startApiServer(database.url);
});

beforeEach(async () => {
	world = await makeWorld(connection.db, plan);
	({ floorplanId } = world);
	placer = createClient(server.as(world.members.placer.token));
	lead = createClient(server.as(world.members.lead.token));
	viewer = createClient(server.as(world.members.viewer.token));
});

afterAll(async () => {
	await server.close();
	await connection.sql.end();
	await database.drop();
});

async function statusOf(act: Promise<unknown>): Promise<number> {
	const error: unknown = await act.then(
		() => null,
		(reason: unknown) => reason
	);
	if (error instanceof ApiError) return error.problem.status;
	throw new Error(`not refused: ${String(error)}`);
}

async function edit(...operations: Operation[]): Promise<void> {
	const { version } = await lead.getFloorplan(floorplanId);
	const submitted = { id: crypto.randomUUID(), label: 'Test', baseVersion: version, operations };
	await placer.submitEdit(floorplanId, submitted);
}

function onRegulator(by: ApiClient): Promise<Thread> {
	const anchor = { kind: 'item', list: 'regulators', id: unit.id } as const;
	return by.openThread({ floorplanId }, { anchor, text: 'Why here?' });
}

async function anchorNow(): Promise<Thread['anchor']> {
	const [thread] = await lead.listThreads({ floorplanId });
	return thread.anchor;
}

describe('UX-52: a thread', () => {
	it('is opened, answered, resolved and reopened, with who and when', async () => {
		const { id } = await onRegulator(viewer);
		await lead.addComment(id, 'Because of the block beside it.');
		const resolved = await lead.resolveThread(id);
		expect(resolved.isResolved).toBe(true);
		const reopened = await viewer.reopenThread(id);
		expect(reopened).toMatchObject({ isResolved: false, openedBy: { name: 'viewer' } });
		expect(reopened.history.map(({ act, by }) => `${act} ${by.name}`)).toEqual([
			'resolve lead',
			'reopen viewer'
		]);
		expect(reopened.comments.map(({ by, text }) => `${by.name}: ${text}`)).toEqual([
			'viewer: Why here?',
			'lead: Because of the block beside it.'
		]);
	});

	it('that is resolved stays in the list', async () => {
		const { id } = await onRegulator(viewer);
		await lead.resolveThread(id);
		const listed = await placer.listThreads({ floorplanId });
		expect(listed.map(({ isResolved }) => isResolved)).toEqual([true]);
	});

	it('resolved twice is resolved once', async () => {
		const { id } = await onRegulator(viewer);
		await Promise.all(Array.from({ length: 6 }, () => lead.resolveThread(id)));
		const [thread] = await lead.listThreads({ floorplanId });
		expect(thread.history).toHaveLength(1);
	});

	it('is settled by its opener whatever their role, by others as their role says', async () => {
		const own = await onRegulator(viewer);
		expect((await viewer.resolveThread(own.id)).isResolved).toBe(true);
		const other = await onRegulator(placer);
		expect(await statusOf(viewer.resolveThread(other.id))).toBe(403);
	});

	it('is about a place or about the plan as a whole as well', async () => {
		const place = { kind: 'place', xUm: 12.5, yUm: 7 } as const;
		await viewer.openThread({ floorplanId }, { anchor: place, text: 'What is here?' });
		await viewer.openThread({ floorplanId }, { anchor: { kind: 'plan' }, text: 'Is it done?' });
		const anchors = (await lead.listThreads({ floorplanId })).map(({ anchor }) => anchor);
		expect(anchors).toEqual([{ kind: 'plan' }, { kind: 'place', atUm: [12.5, 7] }]);
	});

	it.each([
		['blocks', 'b1', [20, 20]],
		['regulators', 'r1', [10, 10]],
		['straps', plan.straps[0].id, [25, 25]],
		['nets', 'vdd', null],
		['modes', 'busy', null]
	] as const)('on %s %s stands in its middle, or nowhere', async (list, id, atUm) => {
		const anchor = { kind: 'item', list, id } as const;
		const opened = await viewer.openThread({ floorplanId }, { anchor, text: 'Is this right?' });
		expect(opened.anchor).toEqual({ kind: 'item', list, id, atUm, isPresent: true });
	});

	it('on an object that is not there is refused', async () => {
		const anchor = { kind: 'item', list: 'regulators', id: 'nowhere' } as const;
		expect(await statusOf(viewer.openThread({ floorplanId }, { anchor, text: 'So?' }))).toBe(422);
	});

	it('on a revision is the revision’s, not the draft’s', async () => {
		const revision = await placer.freezeRevision(floorplanId, { baseVersion: 1 });
		const scope = { revisionId: revision.id };
		const anchor = { kind: 'item', list: 'regulators', id: unit.id } as const;
		const { id } = await viewer.openThread(scope, { anchor, text: 'Is this meant?' });
		expect(await lead.listThreads({ floorplanId })).toEqual([]);
		expect((await lead.listThreads(scope)).map((thread) => thread.id)).toEqual([id]);
		expect((await lead.getRevision(revision.id)).openThreads).toBe(1);
		await lead.resolveThread(id);
		expect((await lead.getRevision(revision.id)).openThreads).toBe(0);
		await edit({ op: 'remove', list: 'regulators', index: 0, item: unit as Item });
		const [kept] = await lead.listThreads(scope);
		expect(kept.anchor).toMatchObject({ isPresent: true });
	});

	it('tells the pages of its floorplan', async () => {
		const path = `/api/v1/floorplans/${floorplanId}/events`;
		const events = await readEvents(server.as(world.members.lead.token), path);
		await events.next('ready');
		const { id } = await onRegulator(viewer);
		const event = floorplanEventSchema.parse(await events.next('thread'));
		expect(event).toEqual({ type: 'thread', id, revisionId: null });
		events.close();
	});
});

describe('UX-53: a thread survives its object', () => {
	it('follows it, says when it is deleted and where it was last, and comes back with an undo', async () => {
		const { anchor } = await onRegulator(viewer);
		if (anchor.kind !== 'item' || !anchor.atUm) throw new Error('not pinned to the regulator');
		const [xUm, yUm] = anchor.atUm;
		const moved = { ...unit, xUm: unit.xUm + 4 };
		await edit({
			op: 'change',
			list: 'regulators',
			id: unit.id,
			field: 'xUm',
			from: unit.xUm,
			to: moved.xUm
		});
		const here = [xUm + 4, yUm];
		expect(await anchorNow()).toMatchObject({ isPresent: true, atUm: here });
		await edit({ op: 'remove', list: 'regulators', index: 0, item: moved as Item });
		expect(await anchorNow()).toMatchObject({ isPresent: false, atUm: here });
		await edit({ op: 'insert', list: 'regulators', index: 0, item: moved as Item });
		expect(await anchorNow()).toMatchObject({ isPresent: true, atUm: here });
	});
});

describe('UX-54: a deleted comment', () => {
	it('leaves its place: the first of three keeps the thread, and nobody gets its words', async () => {
		const { id, comments } = await onRegulator(viewer);
		await lead.addComment(id, 'Second.');
		await placer.addComment(id, 'Third.');
		const after = await viewer.deleteComment(id, comments[0].id);
		expect(after.comments.map(({ by, text }) => [by.name, text])).toEqual([
			['viewer', null],
			['lead', 'Second.'],
			['placer', 'Third.']
		]);
		expect(after.openedBy.name).toBe('viewer');
		expect(after.comments[0].deletedAt).not.toBeNull();
		const stored = await connection.sql`select text from comments where id = ${comments[0].id}`;
		expect(stored[0].text).toBe('');
	});

	it('is deleted by its author alone', async () => {
		const { id, comments } = await onRegulator(viewer);
		expect(await statusOf(lead.deleteComment(id, comments[0].id))).toBe(403);
	});

	it.each([
		['of another thread', async () => (await onRegulator(viewer)).comments[0].id],
		['that is not there', () => Promise.resolve(crypto.randomUUID())],
		['with an id that is none', () => Promise.resolve('first')]
	])('%s is not found', async (_what, other) => {
		const { id } = await onRegulator(viewer);
		expect(await statusOf(viewer.deleteComment(id, await other()))).toBe(404);
	});

	it('deleted twice stays as it was', async () => {
		const { id, comments } = await onRegulator(viewer);
		const once = await viewer.deleteComment(id, comments[0].id);
		expect(await viewer.deleteComment(id, comments[0].id)).toEqual(once);
	});
});

describe('what is written', () => {
	it.each([
		['nothing', '   '],
		['too much', 'x'.repeat(10_001)]
	])('%s is refused', async (_what, text) => {
		const anchor = { kind: 'plan' } as const;
		expect(await statusOf(viewer.openThread({ floorplanId }, { anchor, text }))).toBe(422);
	});

	it('is kept to the letter', async () => {
		const text = '<b>&amp; "Ω"</b>\n-- \u{1F50C}';
		const { comments } = await viewer.openThread(
			{ floorplanId },
			{ anchor: { kind: 'plan' }, text }
		);
		expect(comments[0].text).toBe(text);
	});
});
