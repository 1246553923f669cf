import { count, eq, sql } from 'drizzle-orm';
import type { FloorplanSummary, ProjectRole } from '#lib/contracts/index.ts';
import { makeDemoFloorplan } from '#lib/demo/index.ts';
import { openStacks } from '#lib/library/index.ts';
import type { Actor } from '../audit.ts';
import { hashPassword } from '../auth/password.ts';
import type { Database } from '../db/client.ts';
import { libraryItems, projectMembers, projects, teams, users } from '../db/schema/index.ts';
import { createFloorplan, insertFloorplan } from './floorplans.ts';
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
 * Loads the demo team, project, library and floorplan into a database without any people, and asks
 * for its solves. Returns the sign-ins while the demo team is there, null in a database of others.
 */
export async function loadDemo(db: Database): Promise<DemoAccounts | null> {
	const passwordHash = await hashPassword(DEMO_PASSWORD);
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
		const byEmail = new Map(rows.map((row) => [row.email, row]));
		const idOf = (email: string) => byEmail.get(email)?.id ?? '';
		const placer: Actor = {
			userId: idOf(PEOPLE[0].email),
			teamId: team.id,
			isTeamAdmin: false,
			name: PEOPLE[0].name,
			requestId: 'demo'
		};
		const [project] = await tx
			.insert(projects)
			.values({ teamId: team.id, name: PROJECT, createdBy: placer.userId })
			.returning();
		await tx
			.insert(projectMembers)
			.values(
				PEOPLE.flatMap(({ email, role }) =>
					role ? [{ projectId: project.id, userId: idOf(email), role }] : []
				)
			);
		const floorplan = makeDemoFloorplan();
		await tx.insert(libraryItems).values([
			...openStacks.map((item) => ({
				teamId: team.id,
				kind: 'stack' as const,
				key: item.id,
				version: item.version,
				item,
				createdBy: placer.userId
			})),
			...floorplan.cells.map((item) => ({
				teamId: team.id,
				kind: 'cell' as const,
				key: item.id,
				version: 1,
				item,
				createdBy: placer.userId
			}))
		]);
		return { placer, floorplanId: await insertFloorplan(tx, placer, project.id, floorplan) };
	});
	if (loaded) await requestSolves(db, loaded.placer, loaded.floorplanId, {});
	const [demo] = await db.select({ id: teams.id }).from(teams).where(eq(teams.name, TEAM));
	return demo ? accounts : null;
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
