import { eq, sql } from 'drizzle-orm';
import type { z } from 'zod';
import type { changePasswordSchema, signInSchema, signUpSchema } from '#lib/contracts/index.ts';
import { audit, type Actor } from '../audit.ts';
import { checkPassword, hashPassword, passwordProblem } from '../auth/password.ts';
import { countSignIn, countTry, forgetTries, noteSignIn } from '../auth/rate-limit.ts';
import { beginSession, endAllSessions, endSession } from '../auth/session.ts';
import type { Database } from '../db/client.ts';
import { teams, users } from '../db/schema/index.ts';
import { log } from '../log.ts';
import { sendMail } from '../mail/mail.ts';
import { Problem } from '../problem.ts';

/** Where a request comes from. */
export interface Caller {
	readonly address: string;
	readonly userAgent: string;
	readonly requestId: string;
}

function refusePassword(path: string, message: string): never {
	throw new Problem('invalid', message, { errors: [{ path, message }] });
}

async function findUser(db: Database, email: string) {
	const [user] = await db
		.select()
		.from(users)
		.where(eq(sql`lower(${users.email})`, email.toLowerCase()));
	return user;
}

/** Founds a team with its first person as admin, and signs them in. Returns the session's token. */
export async function signUp(
	db: Database,
	input: z.output<typeof signUpSchema>,
	caller: Caller
): Promise<string> {
	await countTry(db, 'sign-up-address', caller.address);
	const problem = passwordProblem(input.password, [input.email, input.name, input.team]);
	if (problem) refusePassword('password', problem);
	const passwordHash = await hashPassword(input.password);
	const userId = await db.transaction(async (tx) => {
		const [team] = await tx.insert(teams).values({ name: input.team }).returning();
		const [user] = await tx
			.insert(users)
			.values({
				teamId: team.id,
				email: input.email,
				name: input.name,
				passwordHash,
				isTeamAdmin: true
			})
			.onConflictDoNothing()
			.returning();
		if (!user) {
			const message = 'This address cannot be used. If it is yours, sign in instead.';
			throw new Problem('invalid', message, { errors: [{ path: 'email', message }] });
		}
		await audit(tx, {
			teamId: team.id,
			userId: user.id,
			requestId: caller.requestId,
			action: 'team.found',
			objectKind: 'team',
			objectId: team.id
		});
		return user.id;
	});
	return beginSession(db, userId, caller.userAgent);
}

/** Signs in and returns the session's token. Says the same, as slowly, for an unknown address. */
export async function signIn(
	db: Database,
	{ email, password }: Pick<z.output<typeof signInSchema>, 'email' | 'password'>,
	caller: Caller
): Promise<string> {
	await countSignIn(db, email, caller.address);
	const user = await findUser(db, email);
	const isRight = await checkPassword(user?.passwordHash, password);
	await audit(db, {
		teamId: user?.teamId ?? null,
		userId: user?.id ?? null,
		requestId: caller.requestId,
		action: 'session.begin',
		objectKind: 'user',
		objectId: user?.id ?? 'unknown',
		outcome: isRight ? 'done' : 'refused'
	});
	if (!user || !isRight) throw new Problem('not-signed-in', 'Address or password is not right.');
	await noteSignIn(db, email, caller.address);
	return beginSession(db, user.id, caller.userAgent);
}

/** Changes the password after asking for the present one; every other session ends. */
export async function changePassword(
	db: Database,
	actor: Actor,
	sessionId: string,
	{ current, password }: z.output<typeof changePasswordSchema>
): Promise<void> {
	const [user] = await db.select().from(users).where(eq(users.id, actor.userId));
	await countTry(db, 'confirm-password', user.id);
	if (!(await checkPassword(user.passwordHash, current))) {
		refusePassword('current', 'This is not your present password');
	}
	const problem = passwordProblem(password, [user.email, user.name]);
	if (problem) refusePassword('password', problem);
	const passwordHash = await hashPassword(password);
	await db.transaction(async (tx) => {
		await tx.update(users).set({ passwordHash }).where(eq(users.id, user.id));
		await endAllSessions(tx, user.id, sessionId);
		await audit(tx, {
			teamId: actor.teamId,
			userId: actor.userId,
			requestId: actor.requestId,
			action: 'user.change-password',
			objectKind: 'user',
			objectId: user.id
		});
	});
	await forgetTries(db, 'confirm-password', user.id);
	// The password is changed, whether or not mail works at the moment.
	await sendMail({
		to: user.email,
		subject: 'Your Manyweir password was changed',
		text: 'Your password was changed and all other browsers were signed out. If this was not you, ask the admin of your team at once.'
	}).catch((error: unknown) => log.error({ error }, 'mail about a changed password not sent'));
}

/** Ends the session of this browser. */
export async function signOut(db: Database, actor: Actor, sessionId: string): Promise<void> {
	await endSession(db, sessionId);
	await auditSessions(db, actor, 'session.end');
}

/** Ends every session of whoever asks, this one included. */
export async function signOutEverywhere(db: Database, actor: Actor): Promise<void> {
	await endAllSessions(db, actor.userId);
	await auditSessions(db, actor, 'session.end-all');
}

function auditSessions(db: Database, actor: Actor, action: string): Promise<void> {
	return audit(db, {
		teamId: actor.teamId,
		userId: actor.userId,
		requestId: actor.requestId,
		action,
		objectKind: 'user',
		objectId: actor.userId
	});
}
