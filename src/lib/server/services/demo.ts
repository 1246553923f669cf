import { count, eq, sql } from 'drizzle-orm';
import { PROJECT_ROLES, type FloorplanSummary, type ProjectRole } from '#lib/contracts/index.ts';
import { makeDemoFloorplan, makeDemoHistory } from '#lib/demo/index.ts';
import { openStacks } from '#lib/library/index.ts';
import type { Actor } from '../audit.ts';
import { hashPassword } from '../auth/password.ts';
import type { Database } from '../db/client.ts';
import { libraryItems, projectMembers, projects, teams, users } from '../db/schema/index.ts';
import { solveAll, tellDemoStory, type DemoSolve } from './demo-story.ts';
import { createFloorplan } from './floorplans.ts';
import { requestSolves } from './solves.ts';

/** The invented people of the demo, all with the same password: a demo keeps no secrets. */
const DEMO_PASSWORD = 'many small weirs';
const PEOPLE: readonly {
	name: string;
	email: string;
	role?: ProjectRole;
	isTeamAdmin?: boolean;
}[] = [
	{ name: 'Mira Okonjo', email: 'placer@osier.example', role: 'placer' },
	{ name: 'Anselm Brandt', email: 'analyst@osier.example', role: 'analyst' },
	{ name: 'Livia Tarn', email: 'lead@osier.example', role: 'lead' },
	{ name: 'Pavel Dunne', email: 'viewer@osier.example', role: 'viewer' },
	{ name: 'Ruth Ekholm', email: 'admin@osier.example', isTeamAdmin: true }
];
const TEAM = 'Osier Silicon (demo)';
const PROJECT = 'Osier hub';

/** Any number: two processes that load the demo at once take turns. */
const DEMO_LOCK = 7_218_442;

export interface DemoAccounts {
	readonly password: string;
	readonly people: readonly { name: string; email: string; role: string }[];
}

/** How to sign in to the demo. */
const accounts: DemoAccounts = {
	password: DEMO_PASSWORD,
	people: PEOPLE.map(({ name, email, role }) => ({ name, email, role: role ?? 'team admin' }))
};

/**
 * Loads the demo team, project, library and floorplan with its revisions into a database without any
 * people, and asks for the solves of the draft. Returns the sign-ins while the demo team is there,
 * null in a database of others.
 *
 * @param solve solves a plan in one mode and corner; the revisions come with their results
 */
export async function loadDemo(db: Database, solve: DemoSolve): Promise<DemoAccounts | null> {
	const [{ people }] = await db.select({ people: count() }).from(users);
	if (people === 0) await load(db, solve);
	const [demo] = await db.select({ id: teams.id }).from(teams).where(eq(teams.name, TEAM));
	return demo ? accounts : null;
}

async function load(db: Database, solve: DemoSolve): Promise<void> {
	const passwordHash = await hashPassword(DEMO_PASSWORD);
	const history = makeDemoHistory();
	// Before the transaction: it takes seconds, and its answers do not depend on it.
	const story = {
		history,
		first: await solveAll(solve, history.first),
		second: await solveAll(solve, history.second)
	};
	const loaded = await db.transaction(async (tx) => {
		await tx.execute(sql`select pg_advisory_xact_lock(${DEMO_LOCK})`);
		const [{ people }] = await tx.select({ people: count() }).from(users);
		if (people > 0) return null;
		const [team] = await tx.insert(teams).values({ name: TEAM }).returning();
		const rows = await tx
			.insert(users)
			.values(
				PEOPLE.map(({ name, email, isTeamAdmin = false }) => ({
					teamId: team.id,
					name,
					email,
					isTeamAdmin,
					passwordHash
				}))
			)
			.returning();
		const actorOf = (role: ProjectRole): Actor => {
			const email = PEOPLE.find((person) => person.role === role)?.email;
			const row = rows.find((one) => one.email === email);
			if (!row) throw new Error(`nobody of the demo is ${role}`);
			const { id: userId, name } = row;
			return { userId, teamId: team.id, isTeamAdmin: false, name, requestId: 'demo' };
		};
		const cast = {
			placer: actorOf('placer'),
			analyst: actorOf('analyst'),
			lead: actorOf('lead'),
			viewer: actorOf('viewer')
		};
		const [project] = await tx
			.insert(projects)
			.values({ teamId: team.id, name: PROJECT, createdBy: cast.placer.userId })
			.returning();
		await tx.insert(projectMembers).values(
			PROJECT_ROLES.map((role) => ({
				projectId: project.id,
				userId: cast[role].userId,
				role
			}))
		);
		await tx.insert(libraryItems).values([
			...openStacks.map((item) => ({
				teamId: team.id,
				kind: 'stack' as const,
				key: item.id,
				version: item.version,
				item,
				createdBy: cast.placer.userId
			})),
			...history.draft.cells.map((item) => ({
				teamId: team.id,
				kind: 'cell' as const,
				key: item.id,
				version: 1,
				item,
				createdBy: cast.placer.userId
			}))
		]);
		const floorplanId = await tellDemoStory(tx, cast, project.id, story, new Date());
		return { placer: cast.placer, floorplanId };
	});
	if (loaded) await requestSolves(db, loaded.placer, loaded.floorplanId, {});
}

/** Adds a copy of the demo's floorplan to a project, under a name of its own where one is given. */
export function addDemoFloorplan(
	db: Database,
	actor: Actor,
	projectId: string,
	name: string
): Promise<FloorplanSummary> {
	const document = makeDemoFloorplan();
	return createFloorplan(db, actor, projectId, name || (document.name ?? 'Demo'), document);
}
