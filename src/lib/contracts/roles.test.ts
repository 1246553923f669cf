import { describe, expect, it } from 'vitest';
import { may, PERMISSIONS, PROJECT_ROLES, type Action, type Standing } from './roles.ts';

/**
 * The table of the product, written out by hand: one letter per standing, in the order placer,
 * analyst, lead, viewer, admin of the team outside the project, anybody of the team outside it.
 */
const TABLE: Readonly<Record<Action, string>> = {
	'project.view': 'yyyyyn',
	'project.comment': 'yyyyyn',
	'floorplan.draw': 'ynynnn',
	'floorplan.loads': 'yyynnn',
	'floorplan.create': 'ynynnn',
	'solve.run': 'yyynnn',
	'revision.freeze': 'ynynnn',
	'revision.decide': 'nnynnn',
	'thread.resolve': 'yyynnn',
	'finding.waive': 'nnynnn',
	'project.members': 'nnynyn',
	'project.archive': 'nnynyn',
	'team.members': 'nnnnyn',
	'team.tokens': 'nnnnyn',
	'team.audit': 'nnnnyn',
	'library.propose': 'nyynyn',
	'library.edit': 'nnynyn',
	'team.view': 'yyyyyy',
	'project.create': 'yyyyyy'
};

const STANDINGS: readonly Standing[] = [
	...PROJECT_ROLES.map((role) => ({ role, isTeamAdmin: false })),
	{ isTeamAdmin: true },
	{ isTeamAdmin: false }
];

describe('may', () => {
	it.each(Object.entries(TABLE))('%s: %s', (action, expected) => {
		const answers = STANDINGS.map((standing) => (may(standing, action as Action) ? 'y' : 'n'));
		expect(answers.join('')).toBe(expected);
	});

	it('knows no other action', () => {
		expect(Object.keys(TABLE).sort()).toEqual(Object.keys(PERMISSIONS).sort());
	});

	it('adds the rights of the admin to those of the role, and takes none', () => {
		for (const action of Object.keys(PERMISSIONS) as Action[]) {
			for (const role of PROJECT_ROLES) {
				const both = may({ role, isTeamAdmin: true }, action);
				const either =
					may({ role, isTeamAdmin: false }, action) || may({ isTeamAdmin: true }, action);
				expect(both, `${action} ${role}`).toBe(either);
			}
		}
	});
});
