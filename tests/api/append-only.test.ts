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
	await connection.sql`
		insert into revisions (id, floorplan_id, number, draft_version, hash, document, title, note, frozen_by)
		values ('00000000-0000-4000-8000-000000000005', '00000000-0000-4000-8000-000000000004', 1, 2, '', '{}', '', '',
			'00000000-0000-4000-8000-000000000002')`;
	await connection.sql`
		insert into revision_moves (revision_id, position, from_state, to_state, hash, note, user_id)
		values ('00000000-0000-4000-8000-000000000005', 1, 'draft', 'frozen', '', '', '00000000-0000-4000-8000-000000000002')`;
	await connection.sql`
		insert into results (id, project_id, document_hash, mode, corner, solver_version, file, figures)
		values ('00000000-0000-4000-8000-000000000006', '00000000-0000-4000-8000-000000000003', '', 'm', 'c', '1', '{}', '{}'),
			('00000000-0000-4000-8000-000000000007', '00000000-0000-4000-8000-000000000003', 'other', 'm', 'c', '1', '{}', '{}')`;
	await connection.sql`
		insert into result_maps (result_id, net, gzip)
		values ('00000000-0000-4000-8000-000000000006', 'vdd', ''), ('00000000-0000-4000-8000-000000000007', 'vdd', '')`;
	await connection.sql`
		insert into revision_results (revision_id, mode, corner, result_id)
		values ('00000000-0000-4000-8000-000000000005', 'm', 'c', '00000000-0000-4000-8000-000000000006')`;
	await connection.sql`
		insert into revision_findings (revision_id, kind, list, subject, partner, mode, corner, value, "limit", unit, message)
		values ('00000000-0000-4000-8000-000000000005', 'drop', 'nets', 'vdd', '', 'm', 'c', 2, 1, 'V', '')`;
	await connection.sql`
		insert into threads (id, floorplan_id, anchor_kind, opened_by)
		values ('00000000-0000-4000-8000-000000000008', '00000000-0000-4000-8000-000000000004', 'plan', '00000000-0000-4000-8000-000000000002')`;
	await connection.sql`
		insert into thread_acts (thread_id, act, user_id)
		values ('00000000-0000-4000-8000-000000000008', 'resolve', '00000000-0000-4000-8000-000000000002')`;
	await connection.sql`
		insert into comments (thread_id, text, user_id)
		values ('00000000-0000-4000-8000-000000000008', 'Said once.', '00000000-0000-4000-8000-000000000002')`;
});

afterAll(async () => {
	await connection.sql.end();
	await database.drop();
});

// UX-59 and SEC-47: the database itself refuses, whatever the code above it does.
describe.each([
	['audit_events', 'id = id + 1'],
	['floorplan_edits', 'id = id + 1'],
	['revisions', "title = 'Other'"],
	['revision_moves', "to_state = 'approved'"],
	['revision_results', "mode = 'other'"],
	['revision_findings', 'value = 0'],
	['thread_acts', "act = 'reopen'"]
])('%s', (table, change) => {
	it.each([
		['changed', `update ${table} set ${change}`],
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

describe('what a revision rests on', () => {
	const bound = "'00000000-0000-4000-8000-000000000006'";

	it.each([
		['a result changes', `update results set figures = '{}' where id = ${bound}`, '23001'],
		['a result of a revision is removed', `delete from results where id = ${bound}`, '23001|23503'],
		['results are emptied', 'truncate results cascade', '23001'],
		['a map changes', `update result_maps set net = 'x' where result_id = ${bound}`, '23001'],
		[
			'a map of a revision is removed',
			`delete from result_maps where result_id = ${bound}`,
			'23001'
		],
		['maps are emptied', 'truncate result_maps', '23001'],
		['its floorplan is removed', 'delete from floorplans', '23503'],
		['its project is removed', 'delete from projects', '23001|23503']
	])('is refused when %s', async (_what, statement, codes) => {
		const act = connection.db.execute(sql.raw(statement));
		const code: unknown = expect.stringMatching(new RegExp(`^(${codes})$`));
		await expect(act).rejects.toMatchObject({ cause: { code } });
	});

	it('does not keep results that no revision has', async () => {
		await connection.sql`delete from results where id = '00000000-0000-4000-8000-000000000007'`;
		const left = await connection.sql`select id from results`;
		expect(left).toHaveLength(1);
	});
});

describe('a comment', () => {
	it.each([
		['reworded', "update comments set text = 'Never said.'"],
		['given to somebody else', 'update comments set user_id = gen_random_uuid()'],
		['removed', 'delete from comments']
	])('is never %s', async (_what, statement) => {
		const act = connection.db.execute(sql.raw(statement));
		await expect(act).rejects.toMatchObject({ cause: { code: '23001' } });
	});

	it('is emptied once, for good', async () => {
		await connection.sql`update comments set text = '', deleted_at = now()`;
		const again = connection.db.execute(sql`update comments set deleted_at = null`);
		await expect(again).rejects.toMatchObject({ cause: { code: '23001' } });
	});
});
