/** The event stream of a floorplan: who hears what, in which order, and when it ends. */
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { createClient, floorplanEventSchema } from '#lib/contracts/index.ts';
import { endAllSessions } from '#lib/server/auth/session.ts';
import { connect, type Connection } from '#lib/server/db/client.ts';
import { EventBus } from '#lib/server/events/bus.ts';
import { registry } from '#lib/server/jobs/run-job.ts';
import { startWorker } from '#lib/server/jobs/worker.ts';
import { closeRuntime } from '#lib/server/runtime.ts';
import { startApiServer, type ApiServer } from '../support/api-server.ts';
import { createTestDatabase, type TestDatabase } from '../support/database.ts';
import { readEvents } from '../support/event-stream.ts';
import { addJob, createOutcomes, testKind } from '../support/jobs.ts';
import { addPerson, makeWorld, smallPlan, type World } from '../support/people.ts';

let database: TestDatabase;
let connection: Connection;
let server: ApiServer;
let world: World;

beforeAll(async () => {
	database = await createTestDatabase();
	connection = connect(database.url, 6);
	await createOutcomes(connection);
	server = await startApiServer(database.url);
});

beforeEach(async () => {
	world = await makeWorld(connection.db, smallPlan());
});

afterAll(async () => {
	await server.close();
	await connection.sql.end();
	await database.drop();
});

function pathOf({ floorplanId }: World): string {
	return `/api/v1/floorplans/${floorplanId}/events`;
}

function rename(version: number) {
	return createClient(server.as(world.members.placer.token)).submitEdit(world.floorplanId, {
		id: crypto.randomUUID(),
		label: 'Rename',
		baseVersion: version,
		operations: [{ op: 'change', list: 'blocks', id: 'b1', field: 'name', to: 'CPU' }]
	});
}

async function addMember(name: string) {
	const person = await addPerson(connection.db, world.teamId, name);
	await connection.sql`
		insert into project_members values (${world.projectId}, ${person.actor.userId}, 'viewer')`;
	return person;
}

describe('a stream', () => {
	it('tells of edits, with who made them', async () => {
		const events = await readEvents(server.as(world.members.viewer.token), pathOf(world));
		await events.next('ready');
		await rename(1);
		const event = floorplanEventSchema.parse(await events.next('edit'));
		expect(event).toMatchObject({ type: 'edit', version: 2, by: 'placer' });
		events.close();
	});

	it('tells of a job from waiting to done, never backwards', async () => {
		const events = await readEvents(server.as(world.members.viewer.token), pathOf(world));
		await events.next('ready');
		const job = await addJob(connection, world, 'finish');
		const worker = await startWorker(connection, database.url, registry([testKind(connection)]));
		const order = ['queued', 'running', 'done'];
		const heard: number[] = [];
		while (heard.at(-1) !== 2) {
			const event = floorplanEventSchema.parse(await events.next('job'));
			if (event.type !== 'job') throw new Error('another type');
			expect(event.job.id).toBe(job.id);
			heard.push(order.indexOf(event.job.state));
		}
		expect(heard).toEqual([...heard].sort());
		events.close();
		await worker.stop();
	});

	it('tells nothing of other floorplans', async () => {
		const other = await makeWorld(connection.db, smallPlan());
		const events = await readEvents(server.as(other.members.viewer.token), pathOf(other));
		await events.next('ready');
		await rename(1);
		await connection.sql`select pg_notify('manyweir_events', ${JSON.stringify({
			type: 'edit',
			floorplanId: other.floorplanId,
			version: 99,
			by: 'somebody',
			editId: crypto.randomUUID()
		})})`;
		// In order: had the first been told, it would have come first.
		expect(await events.next('edit')).toMatchObject({ version: 99 });
		events.close();
	});
});

describe('a stream ends', () => {
	it('when its reader leaves the project', async () => {
		const { actor, token } = await addMember('leaving');
		const events = await readEvents(server.as(token), pathOf(world));
		await events.next('ready');
		const lead = createClient(server.as(world.members.lead.token));
		await lead.removeMember(world.projectId, actor.userId);
		await rename(1);
		await events.ended;
		// The edit that showed it was not told any more.
		await expect(events.next('edit')).rejects.toThrow('ended');
	});

	it('when its reader signs out everywhere', async () => {
		const { actor, token } = await addMember('going');
		const events = await readEvents(server.as(token), pathOf(world));
		await events.next('ready');
		await endAllSessions(connection.db, actor.userId);
		await rename(1);
		await events.ended;
		await expect(events.next('edit')).rejects.toThrow('ended');
	});

	it('while others go on', async () => {
		const { actor, token } = await addMember('going');
		const theirs = await readEvents(server.as(token), pathOf(world));
		const ours = await readEvents(server.as(world.members.viewer.token), pathOf(world));
		await theirs.next('ready');
		await ours.next('ready');
		await endAllSessions(connection.db, actor.userId);
		await rename(1);
		await theirs.ended;
		expect(await ours.next('edit')).toMatchObject({ version: 2 });
		ours.close();
	});

	it('harmlessly when its reader is gone before it has begun', async () => {
		const viewer = server.as(world.members.viewer.token);
		await Promise.all(
			Array.from({ length: 20 }, async () => {
				const response = await viewer(pathOf(world));
				await response.body?.cancel();
			})
		);
		await rename(1);
		expect((await viewer(`/api/v1/floorplans/${world.floorplanId}`)).status).toBe(200);
	});
});

describe('two processes', () => {
	it('hear the same', async () => {
		const other = connect(database.url, 2);
		const bus = new EventBus(other);
		const heard = new Promise((resolve) => {
			void bus
				.subscribe(world.floorplanId, { onEvent: resolve, onGap: () => {} })
				.then(() => rename(1));
		});
		expect(await heard).toMatchObject({ type: 'edit', version: 2 });
		await other.sql.end();
	});
});

// Last: it closes what the others use.
describe('a server that stops', () => {
	it('ends its streams at once', async () => {
		const events = await readEvents(server.as(world.members.viewer.token), pathOf(world));
		await events.next('ready');
		await closeRuntime();
		await events.ended;
	});
});
