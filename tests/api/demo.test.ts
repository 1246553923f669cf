/** The demo as a newcomer's database gets it: solved by the worker's own thread, told by the services. */
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import {
	createClient,
	type ApiClient,
	type RevisionDetail,
	type RevisionSummary
} from '#lib/contracts/index.ts';
import { makeDemoFloorplan } from '#lib/demo/index.ts';
import { hashFloorplan } from '#lib/floorplan/index.ts';
import { beginSession } from '#lib/server/auth/session.ts';
import { readConfig } from '#lib/server/config.ts';
import { connect, type Connection } from '#lib/server/db/client.ts';
import { SolveRunner } from '#lib/server/jobs/solve-runner.ts';
import { loadDemo } from '#lib/server/services/demo.ts';
import { startApiServer, type ApiServer } from '../support/api-server.ts';
import { createTestDatabase, type TestDatabase } from '../support/database.ts';

let database: TestDatabase;
let connection: Connection;
let server: ApiServer;
/** One for each of two loaders: a runner does one solve at a time. */
let solvers: SolveRunner[];
let lead: ApiClient;
let floorplanId: string;
let revisions: RevisionSummary[];
/** The first and the second. */
let details: RevisionDetail[];

async function clientOf(email: string): Promise<ApiClient> {
	const [{ id }] = await connection.sql<
		{ id: string }[]
	>`select id from users where email = ${email}`;
	return createClient(server.as(await beginSession(connection.db, id, 'test')));
}

beforeAll(async () => {
	database = await createTestDatabase();
	connection = connect(database.url, 4);
	server = await startApiServer(database.url);
	const thread = join(inject('workerFolder'), 'solve-thread.js');
	const settings = readConfig({ DATABASE_URL: database.url, MANYWEIR_SOLVE_THREAD: thread });
	solvers = [new SolveRunner(settings), new SolveRunner(settings)];
	const { signal } = new AbortController();
	await Promise.all(
		solvers.map((solver) =>
			loadDemo(connection.db, (request) => solver.run(request, signal, () => {}))
		)
	);
	lead = await clientOf('lead@osier.example');
	const [project] = await lead.listProjects();
	floorplanId = project.floorplans[0].id;
	revisions = await lead.listRevisions(floorplanId);
	details = await Promise.all([...revisions].reverse().map(({ id }) => lead.getRevision(id)));
}, 120_000);

afterAll(async () => {
	for (const solver of solvers) solver.stop();
	await server.close();
	await connection.sql.end();
	await database.drop();
});

describe('the demo', () => {
	it('is loaded once, however many load it', async () => {
		const [{ teams }] = await connection.sql`select count(*)::int as teams from teams`;
		expect(teams).toBe(1);
	});

	it('has a revision approved, one returned, and the draft that the generator makes', async () => {
		expect(revisions.map(({ number, state }) => `${number} ${state}`)).toEqual([
			'2 returned',
			'1 approved'
		]);
		const draft = await lead.getFloorplan(floorplanId);
		expect(draft.hash).toBe(hashFloorplan(makeDemoFloorplan()));
	});

	it('has every result of its revisions, with figures that were solved', () => {
		for (const { results } of details) {
			expect(results).toHaveLength(12);
			expect(results.filter(({ state }) => state !== 'complete')).toEqual([]);
		}
		const [first, second] = details;
		expect(first.reading.findings).toBe(0);
		expect(second.reading.findings).toBeGreaterThan(0);
		expect(second.reading.worstDropV ?? 0).toBeGreaterThan(first.reading.worstDropV ?? 0);
	});

	it('has findings in the second alone, all of them new', async () => {
		const [first, second] = details;
		expect((await lead.getFindings(first.id)).findings).toEqual([]);
		const { against, isComplete, findings } = await lead.getFindings(second.id);
		expect({ against, isComplete }).toEqual({ against: 1, isComplete: true });
		expect(findings).toHaveLength(second.reading.findings);
		expect(new Set(findings.map(({ status }) => status))).toEqual(new Set(['new']));
	});

	it('was decided by a lead who had no part in it', () => {
		for (const { moves, authors, hash } of details) {
			const decision = moves.at(-1);
			expect(authors.map(({ name }) => name)).not.toContain(decision?.by.name);
			expect(decision?.by.name).toBe('Livia Tarn');
			expect(decision?.hash).toBe(hash);
		}
		expect(details[0].authors.map(({ name }) => name)).toEqual(['Mira Okonjo']);
		expect(details[1].authors.map(({ name }) => name)).toEqual(['Anselm Brandt', 'Mira Okonjo']);
	});

	it('tells its story in the order of time, up to now', async () => {
		const { edits } = await lead.listEdits(floorplanId, 0);
		const times = [
			...details.flatMap(({ moves }) => moves.map(({ at }) => at)),
			...edits.map(({ at }) => at)
		].sort();
		expect((times.at(-1) ?? '') < new Date().toISOString()).toBe(true);
		const [first, second] = details;
		const versionAt = (version: number) => edits.find((edit) => edit.version === version)?.at ?? '';
		expect((first.moves.at(-1)?.at ?? '') < versionAt(first.draftVersion + 1)).toBe(true);
		expect(versionAt(second.draftVersion) < second.frozenAt).toBe(true);
		expect((second.moves.at(-1)?.at ?? '') < versionAt(second.draftVersion + 1)).toBe(true);
		expect(edits.slice(second.draftVersion - 1).map(({ by }) => by)).not.toContain('Livia Tarn');
	});

	it('has threads of placer, analyst and lead on the returned revision, at real places', async () => {
		const threads = await lead.listThreads({ revisionId: details[1].id });
		const authors = new Set(threads.flatMap(({ comments }) => comments.map(({ by }) => by.name)));
		expect(authors).toEqual(new Set(['Mira Okonjo', 'Anselm Brandt', 'Livia Tarn']));
		expect(threads.map(({ isResolved }) => isResolved).sort()).toEqual([false, false, false, true]);
		expect(details[1].openThreads).toBe(3);
		const { findings } = await lead.getFindings(details[1].id);
		for (const { anchor } of threads) {
			if (anchor.kind !== 'item') continue;
			expect(anchor.isPresent).toBe(true);
			expect(findings.map(({ subject }) => subject)).toContain(anchor.id);
		}
		const [draftThread] = await lead.listThreads({ floorplanId });
		expect(draftThread.anchor).toMatchObject({ kind: 'item', id: 'pll', isPresent: true });
	});

	it('quotes the figure of the finding that a thread is about', async () => {
		const threads = await lead.listThreads({ revisionId: details[1].id });
		const { findings } = await lead.getFindings(details[1].id);
		const worst = findings
			.filter(({ kind, list }) => kind === 'drop' && list === 'blocks')
			.sort((a, b) => b.value - a.value)[0];
		const said = threads.find(
			({ anchor }) => anchor.kind === 'item' && anchor.id === worst.subject
		);
		expect(said?.comments[0].text).toContain(`${Number((worst.value * 1000).toPrecision(3))} mV`);
	});
});
