/** Roles in a project. The admin of a team has rights of their own besides. */
export const PROJECT_ROLES = ['placer', 'analyst', 'lead', 'viewer'] as const;
export type ProjectRole = (typeof PROJECT_ROLES)[number];

/** A person's standing towards an object: their role in its project, and whether they run the team. */
export interface Standing {
	/** Undefined where the person is not a member of the project. */
	readonly role?: ProjectRole;
	readonly isTeamAdmin: boolean;
}

type Grantee = ProjectRole | 'admin' | 'member';

/**
 * Who may do what: the one table that pages, server and tests read. `admin` is the team's admin,
 * whatever their role in the project; `member` is anybody of the team.
 */
export const PERMISSIONS = {
	'project.create': ['member'],
	'project.view': ['placer', 'analyst', 'lead', 'viewer', 'admin'],
	'project.comment': ['placer', 'analyst', 'lead', 'viewer', 'admin'],
	'project.members': ['lead', 'admin'],
	'project.archive': ['lead', 'admin'],
	'floorplan.create': ['placer', 'lead'],
	/** Die, sites, layers, vias, nets, straps, feeds, cells, regulators, keep-outs, mesh. */
	'floorplan.draw': ['placer', 'lead'],
	/** Blocks, modes, corners and limits. */
	'floorplan.loads': ['placer', 'analyst', 'lead'],
	'solve.run': ['placer', 'analyst', 'lead'],
	/** Also asks for its review. */
	'revision.freeze': ['placer', 'lead'],
	/** Never one's own work, whatever the role: the service asks that besides. */
	'revision.decide': ['lead'],
	/** Threads of others; whoever opened one may always resolve or reopen it. */
	'thread.resolve': ['placer', 'analyst', 'lead'],
	'finding.waive': ['lead'],
	'team.view': ['member'],
	'team.members': ['admin'],
	'team.tokens': ['admin'],
	'team.audit': ['admin'],
	'library.propose': ['analyst', 'lead', 'admin'],
	'library.edit': ['lead', 'admin']
} as const satisfies Record<string, readonly Grantee[]>;

export type Action = keyof typeof PERMISSIONS;

/** Whether somebody of this standing may do it. */
export function may({ role, isTeamAdmin }: Standing, action: Action): boolean {
	const grantees: readonly Grantee[] = PERMISSIONS[action];
	return (
		grantees.includes('member') ||
		(role !== undefined && grantees.includes(role)) ||
		(isTeamAdmin && grantees.includes('admin'))
	);
}
