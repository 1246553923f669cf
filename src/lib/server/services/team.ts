import { asc, desc, eq } from 'drizzle-orm';
import { may, type SessionAnswer } from '#lib/contracts/index.ts';
import { requireAccess } from '../access/access.ts';
import type { Actor } from '../audit.ts';
import type { Handle } from '../db/client.ts';
import { auditEvents, teams, users } from '../db/schema/index.ts';

/** Entries of the audit trail that the team page shows. */
const SHOWN_EVENTS = 50;

export interface TeamPage {
	readonly name: string;
	readonly people: readonly { id: string; name: string; email: string; isTeamAdmin: boolean }[];
	/** The newest entries of the audit trail; null for those who may not read it. */
	readonly trail:
		readonly { id: number; at: string; who: string; action: string; outcome: string }[] | null;
}

export async function getTeam(db: Handle, actor: Actor): Promise<TeamPage> {
	await requireAccess(db, actor, 'team.view', { kind: 'team' });
	const [team] = await db.select().from(teams).where(eq(teams.id, actor.teamId));
	const people = await db
		.select({ id: users.id, name: users.name, email: users.email, isTeamAdmin: users.isTeamAdmin })
		.from(users)
		.where(eq(users.teamId, actor.teamId))
		.orderBy(asc(users.name));
	if (!may(actor, 'team.audit')) return { name: team.name, people, trail: null };
	const rows = await db
		.select({ event: auditEvents, who: users.name })
		.from(auditEvents)
		.leftJoin(users, eq(users.id, auditEvents.userId))
		.where(eq(auditEvents.teamId, actor.teamId))
		.orderBy(desc(auditEvents.id))
		.limit(SHOWN_EVENTS);
	const trail = rows.map(({ event, who }) => ({
		id: event.id,
		at: event.at.toISOString(),
		who: who ?? 'nobody',
		action: event.action,
		outcome: event.outcome
	}));
	return { name: team.name, people, trail };
}

/** Who is signed in. */
export async function getSignedIn(db: Handle, actor: Actor): Promise<SessionAnswer> {
	const [row] = await db
		.select({ user: users, teamName: teams.name })
		.from(users)
		.innerJoin(teams, eq(teams.id, users.teamId))
		.where(eq(users.id, actor.userId));
	const { id, name, email, teamId, isTeamAdmin } = row.user;
	return { user: { id, name, email, teamId, isTeamAdmin, teamName: row.teamName } };
}
