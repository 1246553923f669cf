import { and, asc, desc, eq, inArray, sql } from 'drizzle-orm';
import type {
	FloorplanSummary,
	Member,
	Project,
	ProjectRole,
	ProjectSummary
} from '#lib/contracts/index.ts';
import { SOLVER_VERSION } from '#lib/solver/index.ts';
import { requireAccess } from '../access/access.ts';
import { audit, type Actor } from '../audit.ts';
import type { Database, Handle } from '../db/client.ts';
import { floorplans, projectMembers, projects, results, users } from '../db/schema/index.ts';
import { Problem } from '../problem.ts';

/** Summaries of the floorplans of projects, the newest first, with the figures of their results. */
export async function summariseFloorplans(
	db: Handle,
	projectIds: readonly string[]
): Promise<(FloorplanSummary & { projectId: string })[]> {
	if (projectIds.length === 0) return [];
	const rows = await db
		.select({
			id: floorplans.id,
			projectId: floorplans.projectId,
			name: floorplans.name,
			version: floorplans.version,
			regulators: sql<number>`jsonb_array_length(${floorplans.document} -> 'regulators')`,
			blocks: sql<number>`jsonb_array_length(${floorplans.document} -> 'blocks')`,
			combinations: sql<number>`jsonb_array_length(${floorplans.document} -> 'modes') * jsonb_array_length(${floorplans.document} -> 'corners')`,
			updatedAt: floorplans.updatedAt,
			updatedBy: users.name,
			solved: sql<number>`count(${results.id})::int`,
			worstDropV: sql<number | null>`max((${results.figures} ->> 'worstDropV')::float8)`,
			worstMarginV: sql<number | null>`min((${results.figures} ->> 'worstMarginV')::float8)`,
			findings: sql<number | null>`sum((${results.figures} ->> 'findings')::int)::int`
		})
		.from(floorplans)
		.innerJoin(users, eq(users.id, floorplans.updatedBy))
		.leftJoin(
			results,
			and(
				eq(results.projectId, floorplans.projectId),
				eq(results.documentHash, floorplans.hash),
				eq(results.solverVersion, SOLVER_VERSION)
			)
		)
		.where(inArray(floorplans.projectId, [...projectIds]))
		.groupBy(floorplans.id, users.name)
		.orderBy(desc(floorplans.updatedAt));
	return rows.map(({ solved, combinations, worstDropV, worstMarginV, findings, ...row }) => ({
		...row,
		updatedAt: row.updatedAt.toISOString(),
		reading:
			worstDropV === null
				? null
				: { solved, combinations, worstDropV, worstMarginV, findings: findings ?? 0 }
	}));
}

/** The projects that the actor may see: their own, and for a team admin all of the team. */
export async function listProjects(db: Handle, actor: Actor): Promise<ProjectSummary[]> {
	const rows = await db
		.select({
			id: projects.id,
			name: projects.name,
			createdAt: projects.createdAt,
			role: projectMembers.role
		})
		.from(projects)
		.leftJoin(
			projectMembers,
			and(eq(projectMembers.projectId, projects.id), eq(projectMembers.userId, actor.userId))
		)
		.where(eq(projects.teamId, actor.teamId))
		.orderBy(asc(projects.name));
	const visible = rows.filter(({ role }) => role !== null || actor.isTeamAdmin);
	const summaries = await summariseFloorplans(
		db,
		visible.map(({ id }) => id)
	);
	return visible.map((project) => ({
		...project,
		createdAt: project.createdAt.toISOString(),
		floorplans: summaries.filter(({ projectId }) => projectId === project.id)
	}));
}

function listMembers(db: Handle, projectId: string): Promise<Member[]> {
	return db
		.select({ userId: users.id, name: users.name, email: users.email, role: projectMembers.role })
		.from(projectMembers)
		.innerJoin(users, eq(users.id, projectMembers.userId))
		.where(eq(projectMembers.projectId, projectId))
		.orderBy(asc(users.name));
}

export async function getProject(db: Handle, actor: Actor, id: string): Promise<Project> {
	const access = await requireAccess(db, actor, 'project.view', { kind: 'project', id });
	const [project] = await db.select().from(projects).where(eq(projects.id, id));
	return {
		id: project.id,
		name: project.name,
		role: access.role ?? null,
		createdAt: project.createdAt.toISOString(),
		floorplans: await summariseFloorplans(db, [id]),
		members: await listMembers(db, id)
	};
}

/** Founds a project; its founder leads it. */
export async function createProject(db: Database, actor: Actor, name: string): Promise<Project> {
	await requireAccess(db, actor, 'project.create', { kind: 'team' });
	const id = await db.transaction(async (tx) => {
		const [project] = await tx
			.insert(projects)
			.values({ teamId: actor.teamId, name, createdBy: actor.userId })
			.returning();
		await tx
			.insert(projectMembers)
			.values({ projectId: project.id, userId: actor.userId, role: 'lead' });
		await audit(tx, {
			teamId: actor.teamId,
			userId: actor.userId,
			requestId: actor.requestId,
			action: 'project.create',
			objectKind: 'project',
			objectId: project.id,
			detail: { name }
		});
		return project.id;
	});
	return getProject(db, actor, id);
}

/** Gives a person of the team a role in the project, or another one. */
export async function setMember(
	db: Database,
	actor: Actor,
	projectId: string,
	userId: string,
	role: ProjectRole
): Promise<void> {
	await requireAccess(db, actor, 'project.members', { kind: 'project', id: projectId });
	await db.transaction(async (tx) => {
		const [person] = await tx
			.select({ id: users.id })
			.from(users)
			.where(and(eq(users.id, userId), eq(users.teamId, actor.teamId)));
		if (!person) throw new Problem('not-found', 'There is no such person in your team.');
		await tx
			.insert(projectMembers)
			.values({ projectId, userId, role })
			.onConflictDoUpdate({
				target: [projectMembers.projectId, projectMembers.userId],
				set: { role }
			});
		await requireLead(tx, projectId);
		await auditMembership(tx, actor, 'project.set-member', projectId, { userId, role });
	});
}

export async function removeMember(
	db: Database,
	actor: Actor,
	projectId: string,
	userId: string
): Promise<void> {
	await requireAccess(db, actor, 'project.members', { kind: 'project', id: projectId });
	await db.transaction(async (tx) => {
		const [removed] = await tx
			.delete(projectMembers)
			.where(and(eq(projectMembers.projectId, projectId), eq(projectMembers.userId, userId)))
			.returning();
		if (!removed) throw new Problem('not-found', 'This person is not a member of the project.');
		await requireLead(tx, projectId);
		await auditMembership(tx, actor, 'project.remove-member', projectId, { userId });
	});
}

/** A project without a lead could never sign anything off: the last one stays. */
async function requireLead(db: Handle, projectId: string): Promise<void> {
	// Locks the project, so that two leads who leave at once take turns.
	await db.select().from(projects).where(eq(projects.id, projectId)).for('update');
	const leads = await db
		.select({ userId: projectMembers.userId })
		.from(projectMembers)
		.where(and(eq(projectMembers.projectId, projectId), eq(projectMembers.role, 'lead')));
	if (leads.length === 0) {
		throw new Problem('conflict', 'A project keeps at least one lead. Name another lead first.');
	}
}

function auditMembership(
	db: Handle,
	actor: Actor,
	action: string,
	projectId: string,
	detail: Record<string, unknown>
): Promise<void> {
	return audit(db, {
		teamId: actor.teamId,
		userId: actor.userId,
		requestId: actor.requestId,
		action,
		objectKind: 'project',
		objectId: projectId,
		detail
	});
}
