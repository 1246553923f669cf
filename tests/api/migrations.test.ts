/** Migrations on a real server: raced, repeated, and looked for by the ready check. */
import postgres from 'postgres';
import { afterAll, beforeAll, expect, inject, it } from 'vitest';
import { migrateDatabase } from '#lib/server/db/migrate.ts';
import { startApiServer, type ApiServer } from '../support/api-server.ts';

let sql: postgres.Sql;
let server: ApiServer;
const name = `test_${crypto.randomUUID().replaceAll('-', '')}`;
const address = (database: string) => new URL(`/${database}`, inject('templateDatabase')).href;

beforeAll(async () => {
	const maintenance = postgres(address('postgres'), { max: 1 });
	await maintenance.unsafe(`create database ${name}`);
	await maintenance.end();
	sql = postgres(address(name), { max: 2, onnotice: () => {} });
	server = await startApiServer(address(name));
});

afterAll(async () => {
	await server.close();
	await sql.end();
	const maintenance = postgres(address('postgres'), { max: 1 });
	await maintenance.unsafe(`drop database ${name} with (force)`);
	await maintenance.end();
});

const readiness = async () => (await server.as(null)('/readyz')).status;

it('are missed by the ready check on an empty database', async () => {
	expect(await readiness()).toBe(503);
	expect((await server.as(null)('/healthz')).status).toBe(200);
});

it('started by six processes at once run once', async () => {
	await Promise.all(Array.from({ length: 6 }, () => migrateDatabase(address(name), 'drizzle')));
	const [{ applied }] = await sql`
		select count(*)::int as applied from drizzle.__drizzle_migrations`;
	const [{ different }] = await sql`
		select count(distinct hash)::int as different from drizzle.__drizzle_migrations`;
	expect(applied).toBe(different);
	expect(await sql`select 1 from graphile_worker.jobs`).toHaveLength(0);
	expect(await readiness()).toBe(200);
});

it('of a newer build are waited for', async () => {
	await sql`
		delete from drizzle.__drizzle_migrations
		where created_at = (select max(created_at) from drizzle.__drizzle_migrations)`;
	expect(await readiness()).toBe(503);
});
