/** Accounts and sessions: what is stored, what ends when, and how guessing is slowed. */
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { hashPassword } from '#lib/server/auth/password.ts';
import { countSignIn, countTry, noteSignIn } from '#lib/server/auth/rate-limit.ts';
import {
	beginSession,
	endAllSessions,
	endSession,
	listSessions,
	readSession,
	sessionCookie
} from '#lib/server/auth/session.ts';
import { connect, type Connection } from '#lib/server/db/client.ts';
import { Problem } from '#lib/server/problem.ts';
import { changePassword, signIn, signUp, type Caller } from '#lib/server/services/accounts.ts';
import { startApiServer, type ApiServer } from '../support/api-server.ts';
import { createTestDatabase, type TestDatabase } from '../support/database.ts';
import { addPerson, makeWorld, smallPlan, type World } from '../support/people.ts';

const PASSWORD = 'seven tall herons wait';

let database: TestDatabase;
let connection: Connection;
/** As another process of the product would be connected. */
let other: Connection;
let server: ApiServer;
let world: World;
let passwordHash: string;

beforeAll(async () => {
	process.env.MANYWEIR_MAIL_FOLDER = '.manyweir/test-mail';
	database = await createTestDatabase();
	connection = connect(database.url, 4);
	other = connect(database.url, 4);
	server = await startApiServer(database.url);
	world = await makeWorld(connection.db, smallPlan());
	passwordHash = await hashPassword(PASSWORD);
});

afterAll(async () => {
	await server.close();
	await Promise.all([connection.sql.end(), other.sql.end()]);
	await database.drop();
});

let addresses = 0;

/** Somebody at an address of their own. */
function caller(address = `10.0.0.${++addresses}`): Caller {
	return { address, userAgent: 'Test browser', requestId: 'test' };
}

function person() {
	return addPerson(connection.db, world.teamId, 'somebody', { passwordHash });
}

async function problemOf(work: Promise<unknown>): Promise<Problem> {
	const error = await work.then(
		() => null,
		(reason: unknown) => reason
	);
	if (!(error instanceof Problem)) throw new Error(`not refused: ${String(error)}`);
	return error;
}

async function statusAs(token: string): Promise<number> {
	return (await server.as(token)('/api/v1/session')).status;
}

describe('what is stored', () => {
	it('of a session is the hash of its token only', async () => {
		const { email } = await person();
		const token = await signIn(connection.db, { email, password: PASSWORD }, caller());
		// 200 bits in base 32.
		expect(token).toMatch(/^[a-z2-7]{40}$/);
		const rows = await connection.sql`select * from sessions`;
		expect(JSON.stringify(rows)).not.toContain(token);
		const digest = await crypto.subtle.digest('SHA-256', new TextEncoder().encode(token));
		const hash = Buffer.from(digest).toString('hex');
		expect(rows.map(({ id }) => String(id))).toContain(hash);
		// The hash itself opens nothing.
		expect(await statusAs(hash)).toBe(401);
		expect(await statusAs(token)).toBe(200);
	});

	it('of a password is an argon2id string with the parameters of the OWASP cheat sheet', async () => {
		const first = await hashPassword(PASSWORD);
		const second = await hashPassword(PASSWORD);
		expect(first).toMatch(/^\$argon2id\$v=19\$m=19456,t=2,p=1\$/);
		expect(second).not.toBe(first);
	});
});

describe('the cookie', () => {
	it('cannot be read by scripts nor sent from other sites, and behind TLS is bound to the host', () => {
		expect(sessionCookie('t', false)).toMatchObject({
			name: 'manyweir',
			options: { httpOnly: true, sameSite: 'lax', secure: false, path: '/' }
		});
		expect(sessionCookie('t', true)).toMatchObject({
			name: '__Host-manyweir',
			options: { httpOnly: true, sameSite: 'lax', secure: true, path: '/' }
		});
	});

	it('of a session that has ended is taken back', async () => {
		const response = await server.as('a'.repeat(40))('/api/v1/session');
		expect(response.status).toBe(401);
		expect(response.headers.get('set-cookie')).toMatch(/^manyweir=; .*Max-Age=0/);
	});
});

describe('a session', () => {
	it('is a new one at each sign-in, and the old one goes on by itself', async () => {
		const { email } = await person();
		const from = caller();
		const first = await signIn(connection.db, { email, password: PASSWORD }, from);
		const second = await signIn(connection.db, { email, password: PASSWORD }, from);
		expect(second).not.toBe(first);
		expect(await statusAs(first)).toBe(200);
	});

	it('ends at once at sign-out, and only that one', async () => {
		const { actor, token } = await person();
		const second = await beginSession(connection.db, actor.userId, 'Other browser');
		const response = await server.as(token)('/sign-out', { method: 'POST', redirect: 'manual' });
		expect(response.status).toBe(303);
		expect(await statusAs(token)).toBe(401);
		expect(await statusAs(second)).toBe(200);
	});

	it('ends everywhere on demand, in other processes too', async () => {
		const { actor, token } = await person();
		const second = await beginSession(connection.db, actor.userId, 'Other browser');
		expect(await readSession(other.db, second)).not.toBeNull();
		await endAllSessions(connection.db, actor.userId);
		expect(await statusAs(token)).toBe(401);
		expect(await readSession(other.db, second)).toBeNull();
	});

	it('is listed with its browser, and can be ended from another', async () => {
		const { actor, token } = await person();
		await beginSession(connection.db, actor.userId, 'Other browser');
		const listed = await listSessions(connection.db, actor.userId);
		expect(listed.map(({ userAgent }) => userAgent)).toEqual(['Other browser', 'test']);
		await endSession(connection.db, listed[0].id);
		expect(await listSessions(connection.db, actor.userId)).toHaveLength(1);
		expect(await statusAs(token)).toBe(200);
	});

	it('ends after fourteen days without use, and its row is swept', async () => {
		const { actor, token } = await person();
		await connection.sql`
			update sessions set expires_at = now() - interval '1 second' where user_id = ${actor.userId}`;
		expect(await statusAs(token)).toBe(401);
		await connection.sql`
			insert into sessions (id, user_id, expires_at)
			values ('old', ${actor.userId}, now() - interval '1 day')`;
		await beginSession(connection.db, actor.userId, 'test');
		expect(await connection.sql`select id from sessions where id = 'old'`).toHaveLength(0);
	});

	it('ends sixty days after it began, however much it is used', async () => {
		const { actor, token } = await person();
		await connection.sql`
			update sessions set created_at = now() - interval '61 days' where user_id = ${actor.userId}`;
		expect(await statusAs(token)).toBe(401);
	});

	it('lasts longer when it is used in its second half, and the cookie with it', async () => {
		const { actor, token } = await person();
		await connection.sql`
			update sessions set expires_at = now() + interval '6 days' where user_id = ${actor.userId}`;
		const response = await server.as(token)('/api/v1/session');
		expect(response.headers.get('set-cookie')).toMatch(
			new RegExp(`^manyweir=${token}; Path=/; Max-Age=1209600; HttpOnly; SameSite=lax$`)
		);
		const [{ days }] = await connection.sql<{ days: number }[]>`
			select extract(day from expires_at - now())::int as days from sessions
			where user_id = ${actor.userId}`;
		expect(days).toBe(13);
	});
});

describe('a changed password', () => {
	it('ends every other session, and the old password opens nothing', async () => {
		const { actor, email, token } = await person();
		const own = await readSession(connection.db, token);
		const second = await beginSession(connection.db, actor.userId, 'Other browser');
		const wanted = { current: PASSWORD, password: 'nine slow otters drift' };
		await changePassword(connection.db, actor, own?.id ?? '', wanted);
		expect(await statusAs(token)).toBe(200);
		expect(await statusAs(second)).toBe(401);
		const old = signIn(connection.db, { email, password: PASSWORD }, caller());
		expect((await problemOf(old)).kind).toBe('not-signed-in');
		await signIn(connection.db, { email, password: wanted.password }, caller());
	});

	it('asks for the present one', async () => {
		const { actor } = await person();
		const wanted = { current: 'not this one', password: 'nine slow otters drift' };
		const problem = await problemOf(changePassword(connection.db, actor, '', wanted));
		expect(problem.options.errors).toMatchObject([{ path: 'current' }]);
	});
});

describe('signing up', () => {
	const input = (email: string, password = PASSWORD) => ({
		team: 'New team',
		name: 'Nils Example',
		email,
		password
	});

	it('founds a team whose admin the founder is', async () => {
		const token = await signUp(connection.db, input('nils@new.example'), caller());
		const session = await readSession(connection.db, token);
		expect(session?.user).toMatchObject({ email: 'nils@new.example', isTeamAdmin: true });
	});

	it.each([
		['common', 'password123'],
		['common with digits', 'Qwertyuiop99!'],
		['the name of the product', 'manyweir2026'],
		['of one character', 'aaaaaaaaaaaa'],
		['the own name', 'Example12345'],
		['the own address', 'nils-erik99']
	])('refuses a password that is %s', async (_what, password) => {
		const problem = await problemOf(
			signUp(connection.db, input('nils-erik@weak.example', password), caller())
		);
		expect(problem.options.errors).toMatchObject([{ path: 'password' }]);
	});

	it.each([
		['of 200 characters', 'long sentences make good passwords '.repeat(6).slice(0, 200)],
		['of other scripts', 'длинный пароль 漢字 🦦 ok']
	])('takes a password %s whole', async (what, password) => {
		const email = `${what.length}@strong.example`;
		await signUp(connection.db, input(email, password), caller());
		await signIn(connection.db, { email, password }, caller());
		const cut = signIn(connection.db, { email, password: password.slice(0, -1) }, caller());
		expect((await problemOf(cut)).kind).toBe('not-signed-in');
	});

	it('with one address ten times at once makes one account', async () => {
		const answers = await Promise.allSettled(
			Array.from({ length: 10 }, () =>
				signUp(connection.db, input('Once@new.example'.toUpperCase()), caller())
			)
		);
		expect(answers.filter(({ status }) => status === 'fulfilled')).toHaveLength(1);
		for (const answer of answers) {
			if (answer.status === 'rejected') expect(answer.reason).toBeInstanceOf(Problem);
		}
		const [{ teams }] = await connection.sql`
			select count(*)::int as teams from teams t join users u on u.team_id = t.id
			where lower(u.email) = 'once@new.example'`;
		expect(teams).toBe(1);
	});
});

describe('guessing', () => {
	it('answers the same for an unknown address and a wrong password', async () => {
		const { email } = await person();
		const wrong = await problemOf(signIn(connection.db, { email, password: 'wrong' }, caller()));
		const unknown = await problemOf(
			signIn(connection.db, { email: 'nobody@no.example', password: 'wrong' }, caller())
		);
		expect(unknown.message).toBe(wrong.message);
		expect(unknown.status).toBe(wrong.status);
	});

	it('at one account is slowed over all processes and addresses', async () => {
		const { email } = await person();
		const answers = await Promise.allSettled(
			Array.from({ length: 40 }, (_, i) =>
				countSignIn((i % 2 === 0 ? connection : other).db, email, `10.1.0.${i}`)
			)
		);
		expect(answers.filter(({ status }) => status === 'fulfilled')).toHaveLength(10);
		const problem = await problemOf(signIn(other.db, { email, password: PASSWORD }, caller()));
		expect(problem.kind).toBe('too-many');
		expect(problem.options.retryAfterSeconds).toBeGreaterThan(14 * 60);
		expect(problem.options.retryAfterSeconds).toBeLessThanOrEqual(15 * 60);
	});

	it('from one address is slowed over all accounts', async () => {
		const answers = await Promise.allSettled(
			Array.from({ length: 60 }, (_, i) =>
				countSignIn((i % 2 === 0 ? connection : other).db, `x${i}@no.example`, '10.2.0.1')
			)
		);
		expect(answers.filter(({ status }) => status === 'fulfilled')).toHaveLength(50);
	});

	it('from elsewhere does not keep out whoever signed in here before', async () => {
		const { email } = await person();
		const home = caller();
		await signIn(connection.db, { email, password: PASSWORD }, home);
		for (let i = 0; i < 12; i++) {
			await countSignIn(connection.db, email, `10.3.0.${i}`).catch(() => {});
		}
		await expect(
			problemOf(signIn(connection.db, { email, password: PASSWORD }, caller()))
		).resolves.toMatchObject({ kind: 'too-many' });
		expect(await signIn(connection.db, { email, password: PASSWORD }, home)).toBeTruthy();
	});

	it('from an address that is known is slowed all the same', async () => {
		const { email } = await person();
		await noteSignIn(connection.db, email, '10.4.0.1');
		const answers = await Promise.allSettled(
			Array.from({ length: 20 }, () => countSignIn(connection.db, email, '10.4.0.1'))
		);
		expect(answers.filter(({ status }) => status === 'fulfilled')).toHaveLength(10);
	});

	it('ends by itself', async () => {
		const { email } = await person();
		for (let i = 0; i < 11; i++)
			await countTry(connection.db, 'sign-in-account', email).catch(() => {});
		await connection.sql`
			update rate_limits set expire = now() - interval '1 second' where key like ${`%${email}`}`;
		expect(await signIn(connection.db, { email, password: PASSWORD }, caller())).toBeTruthy();
	});

	it('is written into the audit trail, right or wrong', async () => {
		const { actor, email } = await person();
		await problemOf(signIn(connection.db, { email, password: 'wrong' }, caller()));
		await signIn(connection.db, { email, password: PASSWORD }, caller());
		const trail = await connection.sql`
			select action, outcome from audit_events where user_id = ${actor.userId} order by id`;
		expect(trail.map(({ action, outcome }) => `${action} ${outcome}`)).toEqual([
			'session.begin refused',
			'session.begin done'
		]);
	});
});
