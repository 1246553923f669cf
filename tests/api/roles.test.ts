/**
 * Who may do what, over HTTP: every operation of the API against every standing. The expected answers
 * are written out here from the product's table, not taken from the code that decides.
 */
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { connect, type Connection } from '#lib/server/db/client.ts';
import { resultMaps, results } from '#lib/server/db/schema/index.ts';
import { figuresOf } from '#lib/server/jobs/solve-kind.ts';
import { insertFloorplan } from '#lib/server/services/floorplans.ts';
import { askReview } from '#lib/server/services/review.ts';
import { freeze } from '#lib/server/services/revisions.ts';
import { requestSolves } from '#lib/server/services/solves.ts';
import { openThread } from '#lib/server/services/threads.ts';
import { SOLVER_VERSION } from '#lib/solver/index.ts';
import { routes, startApiServer, type ApiServer } from '../support/api-server.ts';
import { createTestDatabase, type TestDatabase } from '../support/database.ts';
import { addPerson, makeWorld, smallPlan, type Person, type World } from '../support/people.ts';
import { solveAndKeep } from '../support/solve-and-keep.ts';
import { solved } from '../support/solving.ts';

let database: TestDatabase;
let connection: Connection;
let server: ApiServer;
let world: World;
/** Another team, with the same kinds of things. */
let others: World;

const plan = smallPlan();

beforeAll(async () => {
	database = await createTestDatabase();
	connection = connect(database.url, 4);
	server = await startApiServer(database.url);
	world = await makeWorld(connection.db, plan);
	others = await makeWorld(connection.db, plan);
	for (const { id: mode } of solvedPlan.modes) {
		await solveAndKeep(connection, world, solvedPlan, { mode });
	}
});

afterAll(async () => {
	await server.close();
	await connection.sql.end();
	await database.drop();
});

const STANDINGS = [
	'placer',
	'analyst',
	'lead',
	'viewer',
	'admin',
	'colleague',
	'stranger',
	'strange admin',
	'nobody'
] as const;
type Standing = (typeof STANDINGS)[number];

function personOf(standing: Standing): Person | null {
	switch (standing) {
		case 'admin':
			return world.admin;
		case 'colleague':
			return world.colleague;
		case 'stranger':
			return others.members.lead;
		case 'strange admin':
			return others.admin;
		case 'nobody':
			return null;
		default:
			return world.members[standing];
	}
}

/** Those for whom an object of the project exists. */
const SEE: readonly Standing[] = ['placer', 'analyst', 'lead', 'viewer', 'admin'];
const DRAW: readonly Standing[] = ['placer', 'lead'];
const LOADS: readonly Standing[] = ['placer', 'analyst', 'lead'];
const SOLVE: readonly Standing[] = ['placer', 'analyst', 'lead'];
const MEMBERS: readonly Standing[] = ['lead', 'admin'];
const SIGNED_IN = STANDINGS.filter((standing) => standing !== 'nobody');

interface Call {
	readonly path: string;
	readonly body?: unknown;
}

interface Operation {
	readonly method: string;
	/** As in `routes`. */
	readonly route: string;
	readonly what: string;
	readonly allowed: readonly Standing[];
	/** It is about the team of whoever asks: nobody's other team comes into it. */
	readonly isOwnTeam?: boolean;
	call(): Call | Promise<Call>;
}

async function keptResult(): Promise<string> {
	const { result } = solved(plan);
	const [row] = await connection.db
		.insert(results)
		.values({
			projectId: world.projectId,
			documentHash: crypto.randomUUID(),
			mode: 'default',
			corner: 'nominal',
			solverVersion: SOLVER_VERSION,
			file: result,
			figures: figuresOf(result)
		})
		.returning();
	// A gzip file of nothing.
	const gzip = Buffer.from('1f8b0800000000000003030000000000000000000', 'hex');
	await connection.db.insert(resultMaps).values({ resultId: row.id, net: 'vdd', gzip });
	return row.id;
}

async function waitingJob(): Promise<string> {
	const { jobs } = await requestSolves(
		connection.db,
		world.members.placer.actor,
		world.floorplanId,
		{ mode: 'busy' }
	);
	const waiting = jobs.find(({ state }) => state === 'queued');
	return waiting?.id ?? '';
}

/** Its results are kept, so that freezing it asks for no work. */
const solvedPlan = { ...plan, name: 'Solved plan' };

/** A revision of a floorplan of its own, frozen by the placer. */
async function frozen(isInReview = false): Promise<{ id: string; hash: string }> {
	const { actor } = world.members.placer;
	const floorplanId = await insertFloorplan(connection.db, actor, world.projectId, solvedPlan);
	const wanted = { baseVersion: 1, title: '', note: '' };
	const { id, hash } = await freeze(connection.db, actor, floorplanId, wanted);
	if (isInReview) await askReview(connection.db, actor, id, { note: '' });
	return { id, hash };
}

/** A thread that the placer opened. */
async function opened(): Promise<{ id: string; comment: string }> {
	const subject = { kind: 'floorplan', id: world.floorplanId } as const;
	const opening = { anchor: { kind: 'plan' }, text: 'Is this so?' } as const;
	const { actor } = world.members.placer;
	const { id, comments } = await openThread(connection.db, actor, subject, opening);
	return { id, comment: comments[0].id };
}

function edit(operations: readonly unknown[]): Call {
	return {
		path: `/api/v1/floorplans/${world.floorplanId}/edits`,
		body: { id: crypto.randomUUID(), label: 'Test', baseVersion: 1, operations }
	};
}

let counter = 0;

/** A member whom nobody needs. */
async function newcomer(isMember: boolean): Promise<string> {
	const { actor } = await addPerson(connection.db, world.teamId, `newcomer${++counter}`);
	if (isMember) {
		await connection.sql`insert into project_members values (${world.projectId}, ${actor.userId}, 'viewer')`;
	}
	return actor.userId;
}

const EDITS = '/api/v1/floorplans/[floorplanId]/edits';
const OPERATIONS: readonly Operation[] = [
	{
		method: 'GET',
		route: '/api/v1/session',
		what: 'reads who is signed in',
		allowed: SIGNED_IN,
		isOwnTeam: true,
		call: () => ({ path: '/api/v1/session' })
	},
	{
		method: 'GET',
		route: '/api/v1/projects',
		what: 'lists projects',
		allowed: SIGNED_IN,
		isOwnTeam: true,
		call: () => ({ path: '/api/v1/projects' })
	},
	{
		method: 'POST',
		route: '/api/v1/projects',
		what: 'founds a project',
		allowed: SIGNED_IN,
		isOwnTeam: true,
		call: () => ({ path: '/api/v1/projects', body: { name: 'New' } })
	},
	{
		method: 'GET',
		route: '/api/v1/projects/[projectId]',
		what: 'reads a project',
		allowed: SEE,
		call: () => ({ path: `/api/v1/projects/${world.projectId}` })
	},
	{
		method: 'PUT',
		route: '/api/v1/projects/[projectId]/members/[userId]',
		what: 'gives a role',
		allowed: MEMBERS,
		call: async () => ({
			path: `/api/v1/projects/${world.projectId}/members/${await newcomer(false)}`,
			body: { role: 'viewer' }
		})
	},
	{
		method: 'DELETE',
		route: '/api/v1/projects/[projectId]/members/[userId]',
		what: 'removes a member',
		allowed: MEMBERS,
		call: async () => ({
			path: `/api/v1/projects/${world.projectId}/members/${await newcomer(true)}`
		})
	},
	{
		method: 'GET',
		route: '/api/v1/projects/[projectId]/floorplans',
		what: 'lists floorplans',
		allowed: SEE,
		call: () => ({ path: `/api/v1/projects/${world.projectId}/floorplans` })
	},
	{
		method: 'POST',
		route: '/api/v1/projects/[projectId]/floorplans',
		what: 'adds a floorplan',
		allowed: DRAW,
		call: () => ({
			path: `/api/v1/projects/${world.projectId}/floorplans`,
			body: { name: 'Another' }
		})
	},
	{
		method: 'GET',
		route: '/api/v1/floorplans/[floorplanId]',
		what: 'reads a floorplan',
		allowed: SEE,
		call: () => ({ path: `/api/v1/floorplans/${world.floorplanId}` })
	},
	{
		method: 'GET',
		route: '/api/v1/floorplans/[floorplanId]/document',
		what: 'downloads a floorplan',
		allowed: SEE,
		call: () => ({ path: `/api/v1/floorplans/${world.floorplanId}/document` })
	},
	{
		method: 'GET',
		route: '/api/v1/floorplans/[floorplanId]/events',
		what: 'follows a floorplan',
		allowed: SEE,
		call: () => ({ path: `/api/v1/floorplans/${world.floorplanId}/events` })
	},
	{
		method: 'GET',
		route: EDITS,
		what: 'reads the history of edits',
		allowed: SEE,
		call: () => ({ path: `/api/v1/floorplans/${world.floorplanId}/edits?after=0` })
	},
	...(
		['regulators', 'keepouts', 'straps', 'feeds', 'nets', 'layers', 'vias', 'cells'] as const
	).map((list): Operation => ({
		method: 'POST',
		route: EDITS,
		what: `draws (${list})`,
		allowed: DRAW,
		call: () => {
			const item = itemOf(list, `new${++counter}`);
			return edit([
				{ op: 'insert', list, index: 1000, item },
				{ op: 'remove', list, index: 1000, item }
			]);
		}
	})),
	...(['die', 'sites', 'name', 'mesh'] as const).map((property): Operation => ({
		method: 'POST',
		route: EDITS,
		what: `draws (${property})`,
		allowed: DRAW,
		call: () => {
			const value = plan[property];
			return edit([{ op: 'set', property, from: value, to: value }]);
		}
	})),
	...(['blocks', 'modes', 'corners'] as const).map((list): Operation => ({
		method: 'POST',
		route: EDITS,
		what: `changes loads (${list})`,
		allowed: LOADS,
		call: () => {
			const [{ id, name }] = plan[list];
			return edit([{ op: 'change', list, id, field: 'name', from: name, to: name }]);
		}
	})),
	{
		method: 'POST',
		route: EDITS,
		what: 'changes limits',
		allowed: LOADS,
		call: () => edit([{ op: 'set', property: 'limits', from: plan.limits, to: plan.limits }])
	},
	{
		method: 'POST',
		route: EDITS,
		what: 'changes a load and draws in one edit',
		allowed: DRAW,
		call: () =>
			edit([
				{ op: 'set', property: 'limits', from: plan.limits, to: plan.limits },
				{ op: 'set', property: 'die', from: plan.die, to: plan.die }
			])
	},
	{
		method: 'GET',
		route: '/api/v1/floorplans/[floorplanId]/solves',
		what: 'reads solves',
		allowed: SEE,
		call: () => ({ path: `/api/v1/floorplans/${world.floorplanId}/solves` })
	},
	{
		method: 'POST',
		route: '/api/v1/floorplans/[floorplanId]/solves',
		what: 'asks for a solve',
		allowed: SOLVE,
		call: () => ({
			path: `/api/v1/floorplans/${world.floorplanId}/solves`,
			body: { mode: 'default' }
		})
	},
	{
		method: 'GET',
		route: '/api/v1/floorplans/[floorplanId]/revisions',
		what: 'lists revisions',
		allowed: SEE,
		call: () => ({ path: `/api/v1/floorplans/${world.floorplanId}/revisions` })
	},
	{
		method: 'POST',
		route: '/api/v1/floorplans/[floorplanId]/revisions',
		what: 'freezes a revision',
		allowed: DRAW,
		call: async () => {
			const { actor } = world.members.placer;
			const id = await insertFloorplan(connection.db, actor, world.projectId, solvedPlan);
			return { path: `/api/v1/floorplans/${id}/revisions`, body: { baseVersion: 1 } };
		}
	},
	{
		method: 'GET',
		route: '/api/v1/revisions/[revisionId]',
		what: 'reads a revision',
		allowed: SEE,
		call: async () => {
			const { id } = await frozen();
			return { path: `/api/v1/revisions/${id}` };
		}
	},
	{
		method: 'GET',
		route: '/api/v1/revisions/[revisionId]/findings',
		what: 'reads findings',
		allowed: SEE,
		call: async () => {
			const { id } = await frozen();
			return { path: `/api/v1/revisions/${id}/findings` };
		}
	},
	{
		method: 'POST',
		route: '/api/v1/revisions/[revisionId]/solves',
		what: 'solves a revision',
		allowed: SOLVE,
		call: async () => {
			const { id } = await frozen();
			return { path: `/api/v1/revisions/${id}/solves`, body: {} };
		}
	},
	{
		method: 'POST',
		route: '/api/v1/revisions/[revisionId]/review',
		what: 'asks for review',
		allowed: DRAW,
		call: async () => {
			const { id } = await frozen();
			return { path: `/api/v1/revisions/${id}/review`, body: {} };
		}
	},
	{
		method: 'POST',
		route: '/api/v1/revisions/[revisionId]/decision',
		what: 'returns a revision',
		allowed: ['lead'],
		call: async () => {
			const { id, hash } = await frozen(true);
			const body = { decision: 'return', hash, note: 'Not yet.' };
			return { path: `/api/v1/revisions/${id}/decision`, body };
		}
	},
	{
		method: 'POST',
		route: '/api/v1/revisions/[revisionId]/draft',
		what: 'starts the draft anew',
		allowed: DRAW,
		call: async () => {
			const { id } = await frozen();
			return { path: `/api/v1/revisions/${id}/draft`, body: { baseVersion: 1 } };
		}
	},
	{
		method: 'GET',
		route: '/api/v1/floorplans/[floorplanId]/threads',
		what: 'reads threads of a draft',
		allowed: SEE,
		call: () => ({ path: `/api/v1/floorplans/${world.floorplanId}/threads` })
	},
	{
		method: 'POST',
		route: '/api/v1/floorplans/[floorplanId]/threads',
		what: 'opens a thread on a draft',
		allowed: SEE,
		call: () => ({
			path: `/api/v1/floorplans/${world.floorplanId}/threads`,
			body: { anchor: { kind: 'place', xUm: 1, yUm: 2 }, text: 'Why here?' }
		})
	},
	{
		method: 'GET',
		route: '/api/v1/revisions/[revisionId]/threads',
		what: 'reads threads of a revision',
		allowed: SEE,
		call: async () => {
			const { id } = await frozen();
			return { path: `/api/v1/revisions/${id}/threads` };
		}
	},
	{
		method: 'POST',
		route: '/api/v1/revisions/[revisionId]/threads',
		what: 'opens a thread on a revision',
		allowed: SEE,
		call: async () => {
			const { id } = await frozen();
			return {
				path: `/api/v1/revisions/${id}/threads`,
				body: { anchor: { kind: 'place', xUm: 1, yUm: 2 }, text: 'Why here?' }
			};
		}
	},
	{
		method: 'POST',
		route: '/api/v1/threads/[threadId]/comments',
		what: 'comments',
		allowed: SEE,
		call: async () => {
			const { id } = await opened();
			return { path: `/api/v1/threads/${id}/comments`, body: { text: 'Because.' } };
		}
	},
	{
		method: 'POST',
		route: '/api/v1/threads/[threadId]/resolve',
		what: 'resolves a thread of somebody else or their own',
		allowed: ['placer', 'analyst', 'lead'],
		call: async () => {
			const { id } = await opened();
			return { path: `/api/v1/threads/${id}/resolve`, body: {} };
		}
	},
	{
		method: 'POST',
		route: '/api/v1/threads/[threadId]/reopen',
		what: 'reopens a thread of somebody else or their own',
		allowed: ['placer', 'analyst', 'lead'],
		call: async () => {
			const { id } = await opened();
			return { path: `/api/v1/threads/${id}/reopen`, body: {} };
		}
	},
	{
		method: 'DELETE',
		route: '/api/v1/threads/[threadId]/comments/[commentId]',
		what: 'deletes a comment of the placer',
		allowed: ['placer'],
		call: async () => {
			const { id, comment } = await opened();
			return { path: `/api/v1/threads/${id}/comments/${comment}` };
		}
	},
	{
		method: 'GET',
		route: '/api/v1/jobs/[jobId]',
		what: 'reads a job',
		allowed: SEE,
		call: async () => ({ path: `/api/v1/jobs/${await waitingJob()}` })
	},
	{
		method: 'POST',
		route: '/api/v1/jobs/[jobId]/cancel',
		what: 'cancels a job',
		allowed: SOLVE,
		call: async () => ({ path: `/api/v1/jobs/${await waitingJob()}/cancel`, body: {} })
	},
	{
		method: 'GET',
		route: '/api/v1/results/[resultId]',
		what: 'reads a result',
		allowed: SEE,
		call: async () => ({ path: `/api/v1/results/${await keptResult()}` })
	},
	{
		method: 'GET',
		route: '/api/v1/results/[resultId]/maps/[netId]',
		what: 'reads a map',
		allowed: SEE,
		call: async () => ({ path: `/api/v1/results/${await keptResult()}/maps/vdd` })
	}
];

/** An item that may be added to the small plan. */
function itemOf(list: string, id: string): unknown {
	switch (list) {
		case 'regulators':
			return { ...plan.regulators[0], id };
		case 'keepouts':
			return { id, outline: plan.die.outline, forbids: ['regulators'] };
		case 'straps':
			return { ...plan.straps[0], id };
		case 'feeds':
			return { id, net: id, xUm: 0, yUm: 0, seriesOhm: 1 };
		case 'nets':
			return { ...plan.nets[0], id };
		case 'layers':
			return { ...plan.layers[0], id };
		case 'vias':
			return { ...plan.vias[0], id };
		default:
			return { ...plan.cells[0], id };
	}
}

function expectedStatus(operation: Operation, standing: Standing): number {
	if (standing === 'nobody') return 401;
	if (operation.allowed.includes(standing)) return 200;
	return SEE.includes(standing) ? 403 : 404;
}

async function perform(operation: Operation, standing: Standing): Promise<Response> {
	const { path, body } = await operation.call();
	const response = await server.as(personOf(standing)?.token ?? null)(path, {
		method: operation.method,
		...(body === undefined
			? {}
			: { headers: { 'content-type': 'application/json' }, body: JSON.stringify(body) })
	});
	// A stream would go on.
	if (response.headers.get('content-type') === 'text/event-stream') await response.body?.cancel();
	return response;
}

describe.each(OPERATIONS)('$method $route $what', (operation) => {
	it.each(STANDINGS)('%s', async (standing) => {
		const response = await perform(operation, standing);
		const expected = expectedStatus(operation, standing);
		if (expected === 200) {
			expect(response.status, await statusText(response)).toBeGreaterThanOrEqual(200);
			expect(response.status).toBeLessThan(300);
			return;
		}
		expect(response.status).toBe(expected);
		expect(response.headers.get('content-type')).toBe('application/problem+json');
		const problem: unknown = await response.json();
		expect(problem).toMatchObject({
			status: expected,
			title: expect.any(String),
			detail: expect.any(String),
			instance: response.headers.get('x-request-id')
		});
	});
});

async function statusText(response: Response): Promise<string> {
	return response.ok ? '' : response.clone().text();
}

it('has an entry for every operation that there is', () => {
	const listed = new Set(OPERATIONS.map(({ method, route }) => `${method} ${route}`));
	const existing = routes
		.filter(({ id }) => id.startsWith('/api/'))
		.flatMap(({ id, methods }) => methods.map((method) => `${method} ${id}`));
	expect([...listed].sort()).toEqual(existing.sort());
});

describe('what a list shows', () => {
	it.each([
		['a member', 'viewer', true],
		['the admin of the team', 'admin', true],
		['a colleague outside the project', 'colleague', false],
		['another team', 'stranger', false]
	] as const)('%s', async (_who, standing, isVisible) => {
		const response = await server.as(personOf(standing)?.token ?? null)('/api/v1/projects');
		const { projects } = (await response.json()) as { projects: { id: string }[] };
		expect(projects.some(({ id }) => id === world.projectId)).toBe(isVisible);
	});
});

describe('nested ids of another team', () => {
	it('does not let its people into a project', async () => {
		const foreign = others.colleague.actor.userId;
		const response = await server.as(world.members.lead.token)(
			`/api/v1/projects/${world.projectId}/members/${foreign}`,
			{
				method: 'PUT',
				headers: { 'content-type': 'application/json' },
				body: '{"role":"viewer"}'
			}
		);
		expect(response.status).toBe(404);
	});

	it.each(['not-an-id', '00000000-0000-4000-8000-000000000000'])(
		'answers for %s as for a foreign one',
		async (id) => {
			for (const path of ['projects', 'floorplans', 'jobs', 'results', 'revisions']) {
				const response = await server.as(world.admin.token)(`/api/v1/${path}/${id}`);
				expect(response.status, path).toBe(404);
			}
		}
	);
});

describe('a role that changes', () => {
	it('counts from the next request on', async () => {
		const { token, actor } = await addPerson(connection.db, world.teamId, 'changing');
		const lead = server.as(world.members.lead.token);
		const member = `/api/v1/projects/${world.projectId}/members/${actor.userId}`;
		const read = async () =>
			(await server.as(token)(`/api/v1/floorplans/${world.floorplanId}`)).status;
		expect(await read()).toBe(404);
		await lead(member, {
			method: 'PUT',
			headers: { 'content-type': 'application/json' },
			body: '{"role":"viewer"}'
		});
		expect(await read()).toBe(200);
		await lead(member, { method: 'DELETE' });
		expect(await read()).toBe(404);
	});

	it('never leaves a project without a lead', async () => {
		const lead = server.as(world.members.lead.token);
		const own = `/api/v1/projects/${world.projectId}/members/${world.members.lead.actor.userId}`;
		const removed = await lead(own, { method: 'DELETE' });
		expect(removed.status).toBe(409);
		const lowered = await lead(own, {
			method: 'PUT',
			headers: { 'content-type': 'application/json' },
			body: '{"role":"viewer"}'
		});
		expect(lowered.status).toBe(409);
	});
});
