/** Background work: what happens to a job when workers die, people change their mind, or work fails. */
import { spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { eq, sql } from 'drizzle-orm';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, inject, it } from 'vitest';
import { connect, type Connection } from '#lib/server/db/client.ts';
import { jobs } from '#lib/server/db/schema/index.ts';
import { cancelJob } from '#lib/server/jobs/cancel.ts';
import { enqueue, MAX_ATTEMPTS } from '#lib/server/jobs/enqueue.ts';
import { findJob, listJobs, type JobRow } from '#lib/server/jobs/job-rows.ts';
import type { JobKind } from '#lib/server/jobs/job-kind.ts';
import { WorkerPresence } from '#lib/server/jobs/presence.ts';
import { registry, runJob } from '#lib/server/jobs/run-job.ts';
import { startWorker, type Worker } from '#lib/server/jobs/worker.ts';
import { submitEdit } from '#lib/server/services/edits.ts';
import { insertFloorplan } from '#lib/server/services/floorplans.ts';
import { getSolves, requestSolves } from '#lib/server/services/solves.ts';
import { createTestDatabase, type TestDatabase } from '../support/database.ts';
import { addJob, createOutcomes, outcomesOf, testKind } from '../support/jobs.ts';
import { latticePlan, loadAt, regulatorAt } from '../support/plans.ts';
import { makeWorld, smallPlan, type World } from '../support/people.ts';

let database: TestDatabase;
let connection: Connection;
let world: World;
const workers: Worker[] = [];
const processes: ChildProcess[] = [];

beforeAll(async () => {
	database = await createTestDatabase();
	connection = connect(database.url, 8);
	await createOutcomes(connection);
	world = await makeWorld(connection.db, smallPlan());
});

beforeEach(async () => {
	await connection.sql`delete from graphile_worker._private_jobs`;
	await connection.sql`delete from jobs`;
	await connection.sql`truncate test_outcomes`;
});

afterEach(async () => {
	await Promise.all(workers.splice(0).map((worker) => worker.stop()));
	for (const child of processes.splice(0)) {
		if (child.exitCode !== null || child.signalCode !== null) continue;
		child.kill('SIGKILL');
		await once(child, 'exit');
	}
});

afterAll(async () => {
	await connection.sql.end();
	await database.drop();
});

/** A worker in this process. */
async function startHere(): Promise<Worker> {
	const kinds = registry([testKind(connection)]);
	const worker = await startWorker(connection, database.url, kinds);
	workers.push(worker);
	return worker;
}

/** A worker in a process of its own, which can be killed. */
function startProcess(file: string, args: readonly string[] = []): ChildProcess {
	const child = spawn(process.execPath, [...args, file], {
		env: { ...process.env, DATABASE_URL: database.url, LOG_LEVEL: 'silent' },
		stdio: ['ignore', 'ignore', 'inherit']
	});
	processes.push(child);
	return child;
}

async function kill(child: ChildProcess): Promise<void> {
	child.kill('SIGKILL');
	await once(child, 'exit');
}

async function stateOf({ id }: Pick<JobRow, 'id'>): Promise<string | undefined> {
	return (await findJob(connection.db, id))?.state;
}

/** Waits for a state; REL-01 allows a minute for the work of a dead worker to start again. */
function until(job: Pick<JobRow, 'id'>, state: string): Promise<void> {
	return expect.poll(() => stateOf(job), { timeout: 60_000, interval: 20 }).toBe(state);
}

async function queueEntries(): Promise<
	{ key: string | null; attempts: number; isLocked: boolean }[]
> {
	return connection.sql`
		select key, attempts, locked_at is not null as "isLocked" from graphile_worker.jobs order by id`;
}

describe('a worker that is killed', () => {
	it('loses nothing: another does its job, once', { timeout: 120_000 }, async () => {
		const job = await addJob(connection, world, 'hang once');
		const doomed = startProcess('tests/support/test-worker.ts', ['--import', 'tsx']);
		await until(job, 'running');
		await startHere();
		await kill(doomed);
		await until(job, 'done');
		expect(await outcomesOf(connection)).toEqual([{ job: job.id, attempt: 2 }]);
		await expect.poll(queueEntries).toEqual([]);
		expect(await connection.sql`select * from workers`).toHaveLength(1);
	});

	it(
		'in the middle of a solve: the bundled worker solves again',
		{ timeout: 120_000 },
		async () => {
			const size = 160;
			const plan = latticePlan(
				{ columns: size, rows: size, viaOhm: 0.01 },
				{
					regulators: [regulatorAt('r1', 'vdd', 400, 400), regulatorAt('r2', 'vdd', 1200, 1200)],
					blocks: [loadAt('b1', 'vdd', 800, 800, 0.01)]
				}
			);
			const { actor } = world.members.placer;
			const floorplanId = await insertFloorplan(connection.db, actor, world.projectId, plan);
			const { jobs: asked } = await requestSolves(connection.db, actor, floorplanId, {});
			expect(asked).toHaveLength(1);
			const entry = `${inject('workerFolder')}/worker.js`;
			const doomed = startProcess(entry);
			await until(asked[0], 'running');
			await kill(doomed);
			expect(await stateOf(asked[0])).toBe('running');
			startProcess(entry);
			await until(asked[0], 'done');
			const solves = await getSolves(connection.db, actor, floorplanId);
			expect(solves.results).toHaveLength(1);
			expect(solves.jobs).toMatchObject([{ state: 'done', attempt: 2, progress: 1 }]);
		}
	);

	it('after taking a job and before it was seen: the job goes back all the same', async () => {
		const job = await addJob(connection, world, 'finish');
		await connection.sql`update jobs set state = 'running', attempt = 1`;
		await connection.sql`
			update graphile_worker._private_jobs
			set locked_by = 'pool-nobody', locked_at = now() - interval '1 minute', attempts = 1`;
		await startHere();
		await until(job, 'done');
		expect(await outcomesOf(connection)).toEqual([{ job: job.id, attempt: 2 }]);
	});

	it('each time by one job: that job fails, with a reason', async () => {
		const job = await addJob(connection, world, 'finish');
		// As the queue leaves it once the worker of the last attempt is dead.
		await connection.sql`update jobs set state = 'running', attempt = ${MAX_ATTEMPTS}`;
		await connection.sql`
			update graphile_worker._private_jobs
			set locked_by = 'pool-nobody', locked_at = now() - interval '1 minute', attempts = max_attempts`;
		const presence = new WorkerPresence(database.url);
		await presence.enter('pool-test');
		await presence.sweep();
		await presence.leave();
		const found = await findJob(connection.db, job.id);
		expect(found).toMatchObject({ state: 'failed' });
		expect(found?.failure?.message).toContain('each attempt ended with the death of the worker');
		// It can be asked for again.
		const { kind, input, dedupeKey, teamId, floorplanId, requestedBy } = job;
		const again = { kind, input, dedupeKey, teamId, floorplanId, requestedBy };
		expect(await enqueue(connection.db, again)).toMatchObject({ state: 'queued', attempt: 0 });
	});

	it('only in appearance, its connection lost: it takes part again', async () => {
		const job = await addJob(connection, world, 'hang');
		await startHere();
		await until(job, 'running');
		const [{ lockKey }] = await connection.sql<{ lockKey: number }[]>`
			select lock_key as "lockKey" from workers`;
		await connection.sql`
			select pg_terminate_backend(pid) from pg_stat_activity
			where application_name = 'manyweir-worker' and datname = current_database()`;
		const isThere = async () => {
			const rows = await connection.sql<{ lockKey: number; isHeld: boolean }[]>`
				select lock_key as "lockKey", exists (
					select 1 from pg_locks where locktype = 'advisory' and classid = 4310 and objid = lock_key
				) as "isHeld" from workers`;
			return rows.length === 1 && rows[0].lockKey !== lockKey && rows[0].isHeld;
		};
		await expect.poll(isThere, { timeout: 20_000 }).toBe(true);
	});
});

describe('a late attempt', () => {
	it('stores nothing', async () => {
		const job = await addJob(connection, world, 'finish');
		const outcomes: string[] = [];
		let release = () => {};
		let hasBegun = () => {};
		const begun = new Promise<void>((resolve) => (hasBegun = resolve));
		const slow: JobKind<unknown, string> = {
			...testKind(connection),
			async run(_input, { job: { attempt } }) {
				if (attempt === 1) {
					hasBegun();
					await new Promise<void>((resolve) => (release = resolve));
				}
				return `attempt ${attempt}`;
			},
			store: async (_db, _input, outcome) => void outcomes.push(outcome)
		};
		const kinds = registry([slow]);
		const { signal } = new AbortController();
		const first = runJob(connection.db, kinds, job.id, signal, false);
		await begun;
		await runJob(connection.db, kinds, job.id, signal, false);
		release();
		await first;
		expect(outcomes).toEqual(['attempt 2']);
		expect(await findJob(connection.db, job.id)).toMatchObject({ state: 'done', attempt: 2 });
	});

	it('of a job that was cancelled meanwhile stores nothing', async () => {
		const job = await addJob(connection, world, 'finish');
		const kind = testKind(connection);
		const kinds = registry([
			{
				...kind,
				async run() {
					await cancelJob(connection.db, job.id);
					return 1;
				}
			}
		]);
		await runJob(connection.db, kinds, job.id, new AbortController().signal, false);
		expect(await stateOf(job)).toBe('cancelled');
		expect(await outcomesOf(connection)).toEqual([]);
	});

	it('fails as a whole when its outcome cannot be stored', async () => {
		const job = await addJob(connection, world, 'finish');
		const kinds = registry([
			{
				...testKind(connection),
				store: () => Promise.reject(new Error('no room'))
			}
		]);
		const attempt = runJob(connection.db, kinds, job.id, new AbortController().signal, false);
		await expect(attempt).rejects.toThrow('no room');
		expect(await stateOf(job)).toBe('queued');
	});
});

describe('cancelling', () => {
	it('takes a waiting job out of the queue at once', async () => {
		const job = await addJob(connection, world, 'finish');
		await cancelJob(connection.db, job.id);
		expect(await stateOf(job)).toBe('cancelled');
		expect(await queueEntries()).toEqual([]);
	});

	it('stops a running job, and its worker goes on to the next', async () => {
		const job = await addJob(connection, world, 'hang');
		await startHere();
		await until(job, 'running');
		const next = await addJob(connection, world, 'finish');
		await cancelJob(connection.db, job.id);
		expect(await stateOf(job)).toBe('cancelled');
		await until(next, 'done');
		expect(await outcomesOf(connection)).toEqual([{ job: next.id, attempt: 1 }]);
		expect(await stateOf(job)).toBe('cancelled');
	});

	it('leaves a finished job as it is', async () => {
		const job = await addJob(connection, world, 'finish');
		await startHere();
		await until(job, 'done');
		await cancelJob(connection.db, job.id);
		expect(await stateOf(job)).toBe('done');
	});

	it('twenty times at once is cancelling once', async () => {
		const job = await addJob(connection, world, 'finish');
		await Promise.all(Array.from({ length: 20 }, () => cancelJob(connection.db, job.id)));
		expect(await stateOf(job)).toBe('cancelled');
	});
});

describe('a worker that is told to stop', () => {
	it('returns its job with all its attempts, and another finishes it', async () => {
		const job = await addJob(connection, world, 'hang once');
		const first = await startHere();
		await until(job, 'running');
		workers.splice(workers.indexOf(first), 1);
		await first.stop();
		expect(await stateOf(job)).toBe('queued');
		expect(await queueEntries()).toEqual([{ key: job.id, attempts: 0, isLocked: false }]);
		expect(await connection.sql`select * from workers`).toHaveLength(0);
		await startHere();
		await until(job, 'done');
	});
});

describe('work that fails', () => {
	it('is tried again, later each time, and given up in the end', async () => {
		const job = await addJob(connection, world, 'fail');
		await startHere();
		for (let attempt = 1; attempt < MAX_ATTEMPTS; attempt++) {
			const waiting = async () => {
				const [entry] = await connection.sql`
					select attempts, locked_at is null and run_at > now() as "isLater" from graphile_worker.jobs`;
				return entry;
			};
			await expect.poll(waiting, { timeout: 20_000 }).toEqual({ attempts: attempt, isLater: true });
			expect(await stateOf(job)).toBe('queued');
			// The wait itself is the queue's: e to the number of attempts, in seconds.
			await connection.sql`update graphile_worker._private_jobs set run_at = now()`;
		}
		await until(job, 'failed');
		expect(await findJob(connection.db, job.id)).toMatchObject({
			attempt: MAX_ATTEMPTS,
			failure: { message: expect.stringContaining('given up') }
		});
	});

	it('for a fault of the input is not tried again, and says where', async () => {
		const job = await addJob(connection, world, 'refuse');
		await startHere();
		await until(job, 'failed');
		expect(await findJob(connection.db, job.id)).toMatchObject({
			attempt: 1,
			failure: {
				message: 'The input is wrong.',
				problems: [{ path: 'blocks (b1)', message: 'too heavy' }]
			}
		});
		await expect.poll(queueEntries).toEqual([]);
	});

	it('of an unknown kind is not tried again', async () => {
		const job = await addJob(connection, world, 'finish');
		await connection.db.update(jobs).set({ kind: 'unheard of' }).where(eq(jobs.id, job.id));
		await startHere();
		await until(job, 'failed');
	});
});

describe('the queue', () => {
	it('holds a job if and only if its row is there', async () => {
		const undone = connection.db.transaction(async (tx) => {
			await enqueue(tx, {
				kind: 'test',
				input: { course: 'finish' },
				dedupeKey: 'undone',
				teamId: world.teamId,
				floorplanId: world.floorplanId,
				requestedBy: world.members.placer.actor.userId
			});
			throw new Error('changed my mind');
		});
		await expect(undone).rejects.toThrow('changed my mind');
		expect(await connection.sql`select * from jobs`).toHaveLength(0);
		expect(await queueEntries()).toEqual([]);
	});

	it('lets the one job of one person pass the many of another', async () => {
		const many: JobRow[] = [];
		for (let i = 0; i < 5; i++) many.push(await addJob(connection, world, 'finish', 'placer'));
		const one = await addJob(connection, world, 'finish', 'analyst');
		expect(await findJob(connection.db, one.id)).toMatchObject({ ahead: 1 });
		expect(await findJob(connection.db, many[4].id)).toMatchObject({ ahead: 5 });
		await startHere();
		await until(many[4], 'done');
		const order = (await outcomesOf(connection)).map(({ job }) => job);
		expect(order).toEqual([many[0].id, one.id, ...many.slice(1).map(({ id }) => id)]);
	});

	it('does each job once, with three workers on it', async () => {
		const all: JobRow[] = [];
		for (let i = 0; i < 30; i++) all.push(await addJob(connection, world, 'finish'));
		await Promise.all([startHere(), startHere(), startHere()]);
		const countDone = async () =>
			(await connection.sql`select 1 from jobs where state = 'done'`).length;
		await expect.poll(countDone, { timeout: 30_000 }).toBe(30);
		const done = (await outcomesOf(connection)).map(({ job }) => job);
		expect(done.sort()).toEqual(all.map(({ id }) => id).sort());
	});
});

describe('asking for solves', () => {
	it('twenty times at once makes one job of each mode', async () => {
		const { actor } = world.members.placer;
		await Promise.all(
			Array.from({ length: 20 }, () => requestSolves(connection.db, actor, world.floorplanId, {}))
		);
		const found = await listJobs(connection.db, world.floorplanId);
		expect(found.map(({ mode }) => mode).sort()).toEqual(['busy', 'default']);
		expect(await queueEntries()).toHaveLength(2);
	});

	it('for a newer document replaces what still waits for an older one', async () => {
		const { actor } = world.members.placer;
		const { db } = connection;
		const before = await requestSolves(db, actor, world.floorplanId, { mode: 'default' });
		await submitEdit(db, actor, world.floorplanId, {
			id: crypto.randomUUID(),
			label: 'Test',
			baseVersion: 1,
			operations: [{ op: 'set', property: 'name', from: 'Small plan', to: 'Another name' }]
		});
		const after = await requestSolves(db, actor, world.floorplanId, { mode: 'default' });
		expect(after.documentHash).not.toBe(before.documentHash);
		expect(await stateOf(before.jobs[0])).toBe('cancelled');
		const waiting = after.jobs.filter(({ state }) => state === 'queued');
		expect(waiting).toMatchObject([{ documentHash: after.documentHash, mode: 'default' }]);
		expect(await queueEntries()).toHaveLength(1);
	});

	it('is refused to a team that has too many unfinished jobs', async () => {
		const { actor } = world.members.placer;
		await connection.sql`
			insert into jobs (kind, input, dedupe_key, team_id, requested_by)
			select 'test', '{}', 'many:' || i, ${world.teamId}, ${actor.userId}
			from generate_series(1, 255) as i`;
		// Two modes: one too many.
		await expect(requestSolves(connection.db, actor, world.floorplanId, {})).rejects.toMatchObject({
			kind: 'too-many',
			options: { retryAfterSeconds: 30 }
		});
		await requestSolves(connection.db, actor, world.floorplanId, { mode: 'default' });
	});

	it('keeps the document of the request, however the draft goes on', async () => {
		const { actor } = world.members.placer;
		const { documentHash } = await requestSolves(connection.db, actor, world.floorplanId, {});
		const kept = await connection.db.execute(
			sql`select document from documents where hash = ${documentHash}`
		);
		expect(kept).toHaveLength(1);
	});
});
