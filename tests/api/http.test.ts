/** What holds for every answer and every body, whoever asks. */
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { decodeDropMap, resultFileSchema } from '#lib/results/index.ts';
import { parseFloorplan } from '#lib/floorplan/index.ts';
import { createClient, problemSchema } from '#lib/contracts/index.ts';
import { connect, type Connection } from '#lib/server/db/client.ts';
import { ownPath } from '#lib/server/guard.ts';
import { startApiServer, type ApiServer } from '../support/api-server.ts';
import { createTestDatabase, type TestDatabase } from '../support/database.ts';
import { makeWorld, smallPlan, type World } from '../support/people.ts';
import { solveAndKeep } from '../support/solve-and-keep.ts';

let database: TestDatabase;
let connection: Connection;
let server: ApiServer;
let world: World;
let lead: typeof fetch;

const plan = smallPlan();

beforeAll(async () => {
	database = await createTestDatabase();
	connection = connect(database.url, 4);
	server = await startApiServer(database.url);
	world = await makeWorld(connection.db, plan);
	lead = server.as(world.members.lead.token);
});

afterAll(async () => {
	await server.close();
	await connection.sql.end();
	await database.drop();
});

function send(
	method: string,
	path: string,
	body: BodyInit,
	headers: Record<string, string> = {}
): Promise<Response> {
	return lead(path, {
		method,
		body,
		headers: { 'content-type': 'application/json', ...headers }
	});
}

async function projectCount(): Promise<number> {
	const [{ count }] = await connection.sql<{ count: number }[]>`
		select count(*)::int as count from projects`;
	return count;
}

describe('headers', () => {
	it.each([
		['a page of data', '/api/v1/session', 200],
		['a refusal', '/api/v1/projects/none', 404],
		['no address', '/api/v1/nothing', 404],
		['a plain answer', '/healthz', 200]
	])('of %s', async (_what, path, status) => {
		const response = await lead(path);
		expect(response.status).toBe(status);
		expect(Object.fromEntries(response.headers)).toMatchObject({
			'x-content-type-options': 'nosniff',
			'referrer-policy': 'same-origin',
			'x-frame-options': 'DENY',
			'cache-control': 'no-store',
			'content-security-policy': "default-src 'none'; frame-ancestors 'none'; base-uri 'none'",
			'permissions-policy': expect.stringContaining('camera=()'),
			'x-request-id': expect.stringMatching(/^[0-9a-f-]{36}$/)
		});
		expect(response.headers.get('access-control-allow-origin')).toBeNull();
	});

	it('never echo an origin', async () => {
		for (const origin of ['https://evil.example', 'null', server.origin]) {
			const response = await lead('/api/v1/session', { headers: { origin } });
			expect(response.headers.get('access-control-allow-origin')).toBeNull();
		}
	});
});

describe('requests that another site starts', () => {
	it.each([
		['by its own word', { 'sec-fetch-site': 'cross-site' }],
		['from a sister site', { 'sec-fetch-site': 'same-site' }],
		['by origin', { origin: 'https://evil.example' }],
		['by an origin without name', { origin: 'null' }],
		['of the same name but another scheme', { origin: 'https://127.0.0.1' }],
		['with a lying origin', { origin: '', 'sec-fetch-site': 'cross-site' }]
	])('are refused: %s', async (_what, headers) => {
		const before = await projectCount();
		for (const type of ['application/json', 'text/plain', 'application/x-unknown']) {
			const response = await send('POST', '/api/v1/projects', '{"name":"Theirs"}', {
				'content-type': type,
				...headers
			});
			expect(response.status).toBe(403);
			expect(response.headers.get('content-type')).toBe('application/problem+json');
		}
		expect(await projectCount()).toBe(before);
	});

	it.each(['PUT', 'DELETE'])('are refused for %s too', async (method) => {
		const path = `/api/v1/projects/${world.projectId}/members/${world.members.viewer.actor.userId}`;
		const response = await send(method, path, '{"role":"lead"}', {
			'sec-fetch-site': 'cross-site'
		});
		expect(response.status).toBe(403);
	});

	it('of our own pages and of scripts are taken', async () => {
		const own: Record<string, string>[] = [
			{ 'sec-fetch-site': 'same-origin' },
			{ origin: server.origin },
			{}
		];
		for (const headers of own) {
			const response = await send('POST', '/api/v1/projects', '{"name":"Ours"}', headers);
			expect(response.status).toBe(201);
			expect(response.headers.get('location')).toMatch(/^\/api\/v1\/projects\/[0-9a-f-]{36}$/);
		}
	});
});

describe('bodies', () => {
	const EDITS = () => `/api/v1/floorplans/${world.floorplanId}/edits`;
	const FLOORPLANS = () => `/api/v1/projects/${world.projectId}/floorplans`;

	it.each([
		['not JSON', '{"name":', 'application/json', 422],
		['of another type', 'name=x', 'application/x-www-form-urlencoded', 422],
		['not UTF-8', new Uint8Array([0x7b, 0xff, 0x7d]), 'application/json', 422],
		['empty', '', 'application/json', 422],
		['a number', '1', 'application/json', 422],
		['without a name', '{}', 'application/json', 422],
		['with a name that is no text', '{"name":5}', 'application/json', 422],
		['too large', JSON.stringify({ name: 'x'.repeat(70_000) }), 'application/json', 413]
	])('%s are refused', async (_what, body, type, status) => {
		const before = await projectCount();
		const response = await send('POST', '/api/v1/projects', body, { 'content-type': type });
		expect(response.status).toBe(status);
		problemSchema.parse(await response.json());
		expect(await projectCount()).toBe(before);
	});

	it('too large in pieces of unknown length are refused as well', async () => {
		let pieces = 0;
		const body = new ReadableStream<Uint8Array>({
			pull(controller) {
				pieces++;
				if (pieces > 1000) controller.close();
				else controller.enqueue(new TextEncoder().encode('x'.repeat(10_000)));
			}
		});
		const init = { method: 'POST', body, duplex: 'half' };
		const response = await lead('/api/v1/projects', {
			...init,
			headers: { 'content-type': 'application/json' }
		});
		expect(response.status).toBe(413);
	});

	it.each(['role', 'id', 'teamId', 'ownerId', 'createdBy', 'createdAt', 'version', '__proto__'])(
		'with an extra field %s are refused by every operation',
		async (field) => {
			const extra = `"${field}":"x"`;
			const edit = `"id":"${crypto.randomUUID()}","label":"x","baseVersion":1,"operations":[{"op":"set","property":"name","from":"Small plan","to":"y"}]`;
			const member = `/api/v1/projects/${world.projectId}/members/${world.members.viewer.actor.userId}`;
			const calls = [
				['POST', '/api/v1/projects', `{"name":"x",${extra}}`],
				['POST', FLOORPLANS(), `{"name":"x",${extra}}`],
				['POST', `/api/v1/floorplans/${world.floorplanId}/solves`, `{${extra}}`],
				// Fields of its own may come twice: the last counts.
				...(field === 'id' ? [] : [['POST', EDITS(), `{${edit},${extra}}`]]),
				...(field === 'role' ? [] : [['PUT', member, `{"role":"viewer",${extra}}`]])
			];
			for (const [method, path, body] of calls) {
				const response = await send(method, path, body);
				expect(response.status, `${method} ${path}`).toBe(422);
			}
		}
	);

	it('with several faults are told all of them', async () => {
		const response = await send(
			'POST',
			EDITS(),
			'{"id":"x","label":"","baseVersion":-1,"operations":[]}'
		);
		const { errors } = problemSchema.parse(await response.json());
		expect(errors?.map(({ path }) => path).sort()).toEqual([
			'baseVersion',
			'id',
			'label',
			'operations'
		]);
	});

	it('with a file that is no floorplan are told where', async () => {
		const document = { ...plan, layers: [{ ...plan.layers[0], sheetOhm: -1 }, plan.layers[1]] };
		const response = await send('POST', FLOORPLANS(), JSON.stringify({ name: 'x', document }));
		expect(response.status).toBe(422);
		const { errors } = problemSchema.parse(await response.json());
		expect(errors?.[0].path).toContain('m1');
		expect(errors?.[0].path).toContain('sheetOhm');
	});
});

describe('addresses', () => {
	it('that know another method say which', async () => {
		const response = await send('PATCH', '/api/v1/projects', '{}');
		expect(response.status).toBe(405);
		expect(response.headers.get('allow')).toBe('GET, POST');
		expect(problemSchema.parse(await response.json())).toMatchObject({ status: 405 });
	});

	it.each([
		['/projects', '/projects'],
		['/floorplans/1?mode=busy', '/floorplans/1?mode=busy'],
		['//evil.example', '/'],
		['/\\evil.example', '/'],
		['https://evil.example', '/'],
		['%2f%2fevil.example', '/'],
		['/%2fevil.example', '/'],
		['/%5cevil.example', '/'],
		['/%0d%0aset-cookie:x', '/'],
		['/\tevil', '/'],
		['javascript:alert(1)', '/'],
		['/%', '/'],
		['', '/']
	])('to go on to after signing in: %s leads to %s', (wanted, taken) => {
		expect(ownPath(wanted, '/')).toBe(taken);
	});
});

describe('reading never writes', () => {
	it('whatever address is read', async () => {
		const result = await solveAndKeep(connection, world, plan);
		const tables = ['projects', 'floorplans', 'floorplan_edits', 'jobs', 'results', 'documents'];
		const dump = async () =>
			Promise.all(tables.map((table) => connection.sql`select * from ${connection.sql(table)}`));
		const before = await dump();
		for (const path of [
			'/api/v1/session',
			'/api/v1/projects',
			`/api/v1/projects/${world.projectId}`,
			`/api/v1/projects/${world.projectId}/floorplans`,
			`/api/v1/floorplans/${world.floorplanId}`,
			`/api/v1/floorplans/${world.floorplanId}/document`,
			`/api/v1/floorplans/${world.floorplanId}/edits`,
			`/api/v1/floorplans/${world.floorplanId}/solves`,
			`/api/v1/results/${result}`,
			`/api/v1/results/${result}/maps/vdd`
		]) {
			expect((await lead(path)).status, path).toBe(200);
		}
		expect(await dump()).toEqual(before);
	});
});

describe('what is kept', () => {
	it('comes back as a result file and a map, through the client', async () => {
		const id = await solveAndKeep(connection, world, plan);
		const client = createClient(lead);
		const file = await client.getResult(id);
		expect(resultFileSchema.parse(file)).toEqual(file);
		expect(file.nets.map(({ id: net }) => net)).toEqual(['vdd']);
		const map = decodeDropMap(await client.getMap(id, 'vdd'));
		if (!map) throw new Error('no map');
		expect(map.columns * map.rows).toBe(map.dropV.length);
		expect(Math.max(...map.dropV.filter((value) => !Number.isNaN(value)))).toBeGreaterThan(0);
		const missing = await lead(`/api/v1/results/${id}/maps/none`);
		expect(missing.status).toBe(404);
	});

	it('as a document comes back with the same hash', async () => {
		const client = createClient(lead);
		const { hash, document } = await client.getFloorplan(world.floorplanId);
		const response = await lead(`/api/v1/floorplans/${world.floorplanId}/document`);
		expect(response.headers.get('content-disposition')).toBe(
			"attachment; filename*=UTF-8''Small%20plan.manyweir.json"
		);
		const parsed = parseFloorplan(await response.json());
		expect(parsed).toMatchObject({ status: 'parsed' });
		const again = await client.createFloorplan(world.projectId, 'Small plan', document);
		expect((await client.getFloorplan(again.id)).hash).toBe(hash);
	});
});
