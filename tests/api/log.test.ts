import { afterAll, beforeAll, expect, it } from 'vitest';
import { connect, type Connection } from '#lib/server/db/client.ts';
import { teams, users } from '#lib/server/db/schema/index.ts';
import { asProblem } from '#lib/server/hooks/problems.ts';
import { codeOf, loggable } from '#lib/server/log.ts';
import { createTestDatabase, type TestDatabase } from '../support/database.ts';

let database: TestDatabase;
let connection: Connection;

beforeAll(async () => {
	database = await createTestDatabase();
	connection = connect(database.url, 1);
});

afterAll(async () => {
	await connection.sql.end();
	await database.drop();
});

async function failedQuery(secret: string): Promise<unknown> {
	const [{ teamId }] = await connection.db
		.insert(teams)
		.values({ name: 'Team' })
		.returning({ teamId: teams.id });
	const row = { teamId, name: 'A', email: `${secret}@x.example`, passwordHash: secret };
	await connection.db.insert(users).values(row);
	return connection.db
		.insert(users)
		.values(row)
		.catch((error: unknown) => error);
}

it('keeps the values of a failed query out of the log', async () => {
	const secret = crypto.randomUUID();
	const error = await failedQuery(secret);
	// What would be written without care.
	expect(String(error)).toContain(secret);
	const entry = loggable(error);
	expect(JSON.stringify(entry)).not.toContain(secret);
	expect(entry).toMatchObject({
		code: '23505',
		message: expect.stringContaining('users_email_key')
	});
	expect(codeOf(error)).toBe('23505');
});

it.each([
	['an unexpected value', 'text', { message: 'text' }],
	['an error', new TypeError('odd'), { name: 'TypeError', message: 'odd', code: '' }]
])('describes %s', (_what, error, expected) => {
	expect(loggable(error)).toMatchObject(expected);
});

it.each([
	['ECONNREFUSED', 'away'],
	['CONNECTION_CLOSED', 'away'],
	['57P01', 'away'],
	['53100', 'away'],
	['53300', 'away'],
	['55P03', 'busy'],
	['57014', 'busy']
])('tells people of %s that the database is %s', (code, word) => {
	const error = new Error('query', { cause: Object.assign(new Error('inner'), { code }) });
	const problem = asProblem(error);
	expect(problem).toMatchObject({ status: 503, options: { retryAfterSeconds: 5 } });
	expect(problem?.message).toContain(word);
});

it('leaves faults of ours alone', () => {
	expect(asProblem(Object.assign(new Error('x'), { code: '42P01' }))).toBeNull();
	expect(asProblem(new TypeError('x'))).toBeNull();
});
