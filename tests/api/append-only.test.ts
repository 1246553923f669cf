import { sql } from 'drizzle-orm';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { connect, type Connection } from '#lib/server/db/client.ts';
import { createTestDatabase, type TestDatabase } from '../support/database.ts';

let database: TestDatabase;
let connection: Connection;

beforeAll(async () => {
	database = await createTestDatabase();
	connection = connect(database.url, 2);
	await connection.sql`
		insert into audit_events (action, object_kind, object_id, outcome, request_id)
		values ('test.act', 'team', 'x', 'done', 'request')`;
	await connection.sql`insert into teams (id, name) values ('00000000-0000-4000-8000-000000000001', 'T')`;
	await connection.sql`
		insert into users (id, team_id, email, name, password_hash)
		values ('00000000-0000-4000-8000-000000000002', '00000000-0000-4000-8000-000000000001', 'a@b.example', 'A', '')`;
	await connection.sql`
		insert into projects (id, team_id, name, created_by)
		values ('00000000-0000-4000-8000-000000000003', '00000000-0000-4000-8000-000000000001', 'P', '00000000-0000-4000-8000-000000000002')`;
	await connection.sql`
		insert into floorplans (id, project_id, name, hash, document, created_by, updated_by)
		values ('00000000-0000-4000-8000-000000000004', '00000000-0000-4000-8000-000000000003', 'F', '', '{}',
			'00000000-0000-4000-8000-000000000002', '00000000-0000-4000-8000-000000000002')`;
	await connection.sql`
		insert into floorplan_edits (floorplan_id, edit_id, label, operations, base_version, to_version, to_hash, user_id)
		values ('00000000-0000-4000-8000-000000000004', gen_random_uuid(), 'L', '[]', 1, 2, '', '00000000-0000-4000-8000-000000000002')`;
});

afterAll(async () => {
	await connection.sql.end();
	await database.drop();
});

describe.each(['audit_events', 'floorplan_edits'])('%s', (table) => {
	it.each([
		['changed', `update ${table} set id = id + 1`],
		['removed', `delete from ${table}`],
		['emptied', `truncate ${table} cascade`]
	])('is never %s', async (_what, statement) => {
		const act = connection.db.execute(sql.raw(statement));
		await expect(act).rejects.toMatchObject({ cause: { code: '23001' } });
		const [{ rows }] =
			await connection.sql`select count(*)::int as rows from ${connection.sql(table)}`;
		expect(rows).toBe(1);
	});
});
