/**
 * Signed-in browsers. Lucia is behind this module only: its author no longer develops it, so that
 * replacing it must touch this file and no other.
 */
import { DrizzlePostgreSQLAdapter } from '@lucia-auth/adapter-drizzle';
import { sha256 } from '@noble/hashes/sha2.js';
import { bytesToHex, utf8ToBytes } from '@noble/hashes/utils.js';
import { and, desc, eq, gt, ne } from 'drizzle-orm';
import { generateIdFromEntropySize, Lucia, TimeSpan } from 'lucia';
import type { Database, Handle } from '../db/client.ts';
import { sessions, users } from '../db/schema/index.ts';

/** A session ends this long after its last use. */
const IDLE_DAYS = 14;
/** And at the latest this long after it began. */
const ABSOLUTE_DAYS = 60;
const DAY_MS = 86_400_000;
/** 200 bits of chance in a cookie's token. */
const TOKEN_BYTES = 25;

/** What the session knows of its user: nothing secret. */
export interface SessionUser {
	readonly id: string;
	readonly teamId: string;
	readonly name: string;
	readonly email: string;
	readonly isTeamAdmin: boolean;
}

export interface Session {
	/** Hash of the token; safe to compare and to show in part. */
	readonly id: string;
	readonly user: SessionUser;
	readonly expiresAt: Date;
	/** The cookie should be sent again because its end has moved. */
	readonly isFresh: boolean;
}

export interface SessionCookie {
	readonly name: string;
	readonly value: string;
	readonly options: {
		readonly path: '/';
		readonly httpOnly: true;
		readonly sameSite: 'lax';
		readonly secure: boolean;
		readonly maxAge: number;
	};
}

declare module 'lucia' {
	interface Register {
		Lucia: ReturnType<typeof lucia>;
		DatabaseUserAttributes: Omit<SessionUser, 'id'>;
		DatabaseSessionAttributes: { createdAt?: Date; userAgent: string };
	}
}

function lucia(db: Database) {
	return new Lucia(new DrizzlePostgreSQLAdapter(db, sessions, users), {
		sessionExpiresIn: new TimeSpan(IDLE_DAYS, 'd'),
		getUserAttributes: ({ teamId, name, email, isTeamAdmin }) => ({
			teamId,
			name,
			email,
			isTeamAdmin
		}),
		getSessionAttributes: ({ createdAt }) => ({ createdAt })
	});
}

/** The cookie holds the token, the database its hash. */
function hashToken(token: string): string {
	return bytesToHex(sha256(utf8ToBytes(token)));
}

export function sessionCookieName(isSecure: boolean): string {
	return isSecure ? '__Host-manyweir' : 'manyweir';
}

export function sessionCookie(token: string, isSecure: boolean): SessionCookie {
	return {
		name: sessionCookieName(isSecure),
		value: token,
		options: {
			path: '/',
			httpOnly: true,
			sameSite: 'lax',
			secure: isSecure,
			maxAge: (IDLE_DAYS * DAY_MS) / 1000
		}
	};
}

/** Begins a session and gives the token for its cookie. */
export async function beginSession(
	db: Database,
	userId: string,
	userAgent: string
): Promise<string> {
	const token = generateIdFromEntropySize(TOKEN_BYTES);
	// Now and then somebody signs in: a good moment to sweep what has ended.
	await lucia(db).deleteExpiredSessions();
	await lucia(db).createSession(
		userId,
		{ userAgent: userAgent.slice(0, 200) },
		{ sessionId: hashToken(token) }
	);
	return token;
}

/** The session of a cookie's token, or null; an old one is ended on the way. */
export async function readSession(db: Database, token: string): Promise<Session | null> {
	const { session, user } = await lucia(db).validateSession(hashToken(token));
	if (!session) return null;
	const startedAt = session.createdAt?.getTime() ?? 0;
	if (startedAt + ABSOLUTE_DAYS * DAY_MS < Date.now()) {
		await endSession(db, session.id);
		return null;
	}
	const { id, teamId, name, email, isTeamAdmin } = user;
	return {
		id: session.id,
		user: { id, teamId, name, email, isTeamAdmin },
		expiresAt: session.expiresAt,
		isFresh: session.fresh
	};
}

/** Whether a session has not ended: streams that outlive their request ask again. */
export async function isSessionOpen(db: Handle, sessionId: string): Promise<boolean> {
	const rows = await db
		.select({ id: sessions.id })
		.from(sessions)
		.where(and(eq(sessions.id, sessionId), gt(sessions.expiresAt, new Date())));
	return rows.length > 0;
}

export async function endSession(db: Database, sessionId: string): Promise<void> {
	await lucia(db).invalidateSession(sessionId);
}

/** Ends every session of a user, except the one given. */
export async function endAllSessions(db: Handle, userId: string, except = ''): Promise<void> {
	await db.delete(sessions).where(and(eq(sessions.userId, userId), ne(sessions.id, except)));
}

/** A user's open sessions, the newest first. */
export function listSessions(db: Handle, userId: string) {
	return db
		.select({
			id: sessions.id,
			createdAt: sessions.createdAt,
			expiresAt: sessions.expiresAt,
			userAgent: sessions.userAgent
		})
		.from(sessions)
		.where(and(eq(sessions.userId, userId), gt(sessions.expiresAt, new Date())))
		.orderBy(desc(sessions.createdAt));
}
