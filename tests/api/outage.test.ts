/** The database goes away and comes back: nothing ends, and everything goes on by itself. */
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { connect, type Connection } from '#lib/server/db/client.ts';
import { findJob } from '#lib/server/jobs/job-rows.ts';
import { registry } from '#lib/server/jobs/run-job.ts';
import { startWorker, type Worker } from '#lib/server/jobs/worker.ts';
import { startApiServer, type ApiServer } from '../support/api-server.ts';
import { createTestDatabase, type TestDatabase } from '../support/database.ts';
import { readEvents } from '../support/event-stream.ts';
import { addJob, createOutcomes, outcomesOf, testKind } from '../support/jobs.ts';
import { breakable, type BreakableDatabase } from '../support/outage.ts';
import { makeWorld, smallPlan, type World } from '../support/people.ts';

const PATIENT = { timeout: 30_000 };

let database: TestDatabase;
let way: BreakableDatabase;
/** Straight to the database, past the outage. */
let connection: Connection;
let worksHere: Connection;
let worker: Worker;
let server: ApiServer;
let world: World;

beforeAll(async () => {
	database = await createTestDatabase();
	way = await breakable(database.url);
	connection = connect(database.url, 4);
	worksHere = connect(way.url, 4);
	await createOutcomes(connection);
	world = await makeWorld(connection.db, smallPlan());
	server = await startApiServer(way.url);
	worker = await startWorker(worksHere, way.url, registry([testKind(worksHere)]));
});

afterAll(async () => {
	await worker.stop();
	await server.close();
	await worksHere.sql.end();
	await connection.sql.end();
	await way.close();
	await database.drop();
});

/**
 * Follows the floorplan as a page does until an edit is told: a stream that opened before the server
 * heard the database again ends, and the page opens another.
 */
async function nextEdit(fetcher: typeof fetch, path: string): Promise<unknown> {
	for (;;) {
		const events = await readEvents(fetcher, `${path}/events`);
		await events.next('ready');
		await connection.sql`select pg_notify('manyweir_events', ${JSON.stringify({
			type: 'edit',
			floorplanId: world.floorplanId,
			version: 1,
			by: 'placer',
			editId: crypto.randomUUID()
		})})`;
		const edit = await events.next('edit').catch(() => null);
		events.close();
		if (edit) return edit;
	}
}

describe('while the database is away', () => {
	it(
		'requests are answered, streams end, and work goes on afterwards',
		{ timeout: 120_000 },
		async () => {
			const asViewer = server.as(world.members.viewer.token);
			const path = `/api/v1/floorplans/${world.floorplanId}`;
			const running = await addJob(connection, world, 'hang once');
			await expect
				.poll(async () => (await findJob(connection.db, running.id))?.state, PATIENT)
				.toBe('running');
			const before = await readEvents(asViewer, `${path}/events`);
			await before.next('ready');

			await way.cut();
			const response = await asViewer(path);
			expect(response.status).toBe(503);
			expect(response.headers.get('retry-after')).toBe('5');
			expect(response.headers.get('content-type')).toBe('application/problem+json');
			// The session may well be open: the cookie is kept.
			expect(response.headers.get('set-cookie')).toBeNull();
			expect(await response.text()).not.toMatch(/ECONN|postgres|127\.0\.0\.1/);
			expect((await asViewer('/readyz')).status).toBe(503);
			expect((await asViewer('/healthz')).status).toBe(200);

			await way.mend();
			await expect.poll(async () => (await asViewer(path)).status, PATIENT).toBe(200);
			expect((await asViewer('/readyz')).status).toBe(200);
			// Events may have been missed: the page is made to ask anew.
			await before.ended;

			// Work: what was running is done or done again, and new work is taken.
			const next = await addJob(connection, world, 'finish');
			await expect
				.poll(async () => (await findJob(connection.db, next.id))?.state, { timeout: 60_000 })
				.toMatch(/queued|done/);
			expect(await nextEdit(asViewer, path)).toMatchObject({ version: 1, by: 'placer' });
		}
	);

	it(
		'a running job is cancelled although its notice was missed',
		{ timeout: 120_000 },
		async () => {
			// From the test before: hangs in its first attempt.
			const [{ id }] = await connection.sql<{ id: string }[]>`
			select id from jobs where state = 'running'`;
			await way.cut();
			await connection.sql`update jobs set state = 'cancelled', finished_at = now() where id = ${id}`;
			await connection.sql`select graphile_worker.remove_job(${id})`;
			await way.mend();
			const countDone = async () => (await outcomesOf(connection)).length;
			await expect.poll(countDone, { timeout: 60_000 }).toBe(1);
			expect((await findJob(connection.db, id))?.state).toBe('cancelled');
		}
	);
});
