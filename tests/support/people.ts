import { PROJECT_ROLES, type ProjectRole } from '#lib/contracts/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import type { Actor } from '#lib/server/audit.ts';
import { beginSession } from '#lib/server/auth/session.ts';
import type { Database } from '#lib/server/db/client.ts';
import { projectMembers, projects, teams, users } from '#lib/server/db/schema/index.ts';
import { insertFloorplan } from '#lib/server/services/floorplans.ts';
import { cellOf, latticePlan, loadAt, regulatorAt } from './plans.ts';

/** A person with a session, as services and as browsers know them. */
export interface Person {
	readonly actor: Actor;
	readonly email: string;
	/** Token of their session's cookie. */
	readonly token: string;
}

export interface World {
	readonly teamId: string;
	readonly projectId: string;
	readonly floorplanId: string;
	/** Members of the project. */
	readonly members: Readonly<Record<ProjectRole, Person>>;
	/** Admin of the team, not in the project. */
	readonly admin: Person;
	/** Of the team, not in the project. */
	readonly colleague: Person;
}

export async function addPerson(
	db: Database,
	teamId: string,
	name: string,
	{ isTeamAdmin = false, passwordHash = '' } = {}
): Promise<Person> {
	const email = `${name}-${crypto.randomUUID()}@test.example`;
	const [user] = await db
		.insert(users)
		.values({ teamId, name, email, passwordHash, isTeamAdmin })
		.returning();
	return {
		actor: { userId: user.id, teamId, isTeamAdmin, name, requestId: 'test' },
		email,
		token: await beginSession(db, user.id, 'test')
	};
}

/** A team with one person of each standing, a project, and a floorplan in it. */
export async function makeWorld(db: Database, document: Floorplan): Promise<World> {
	const [team] = await db.insert(teams).values({ name: 'Team' }).returning();
	const teamId = team.id;
	const people = new Map<ProjectRole, Person>();
	for (const role of PROJECT_ROLES) people.set(role, await addPerson(db, teamId, role));
	const personOf = (role: ProjectRole): Person => {
		const person = people.get(role);
		if (!person) throw new Error(`nobody is ${role}`);
		return person;
	};
	const members = {
		placer: personOf('placer'),
		analyst: personOf('analyst'),
		lead: personOf('lead'),
		viewer: personOf('viewer')
	};
	const [project] = await db
		.insert(projects)
		.values({ teamId, name: 'Project', createdBy: members.lead.actor.userId })
		.returning();
	await db.insert(projectMembers).values(
		PROJECT_ROLES.map((role) => ({
			projectId: project.id,
			userId: members[role].actor.userId,
			role
		}))
	);
	return {
		teamId,
		projectId: project.id,
		floorplanId: await insertFloorplan(db, members.placer.actor, project.id, document),
		members,
		admin: await addPerson(db, teamId, 'admin', { isTeamAdmin: true }),
		colleague: await addPerson(db, teamId, 'colleague')
	};
}

/** A regulated lattice of size x size crossings with two regulators, two blocks, two modes. */
export function smallPlan(size = 6): Floorplan {
	const far = (size - 2) * 10;
	return latticePlan(
		{ columns: size, rows: size, viaOhm: 0.01 },
		{
			name: 'Small plan',
			cells: [cellOf('unit')],
			regulators: [regulatorAt('r1', 'vdd', 10, 10), regulatorAt('r2', 'vdd', far, far)],
			blocks: [
				loadAt('b1', 'vdd', 20, 20, 0.01, { amps: { default: 0.01, busy: 0.02 } }),
				loadAt('b2', 'vdd', far, 10, 0.01)
			],
			modes: [{ id: 'default' }, { id: 'busy' }]
		}
	);
}
