import { formatProblems } from '#lib/floorplan/index.ts';
import type { ApplyResult, Conflict } from '#lib/floorplan/edits/index.ts';

function describe({ list, id, property, field, reason }: Conflict): string {
	const subject = list && id ? `${id} (${list})` : (property ?? 'the floorplan');
	switch (reason) {
		case 'gone':
			return `${subject} has been deleted meanwhile.`;
		case 'taken':
			return `${subject} is there already.`;
		case 'changed':
			return `Somebody has changed ${field ? `${field} of ${subject}` : subject} meanwhile; it stays as they left it.`;
	}
}

/** Why an edit had no effect, for people. */
export function explainFailure(result: Exclude<ApplyResult, { status: 'applied' }>): string {
	if (result.status === 'refused') return formatProblems(result.problems, 1).join('; ');
	const [first, ...rest] = result.conflicts;
	return rest.length > 0 ? `${describe(first)} And ${rest.length} more.` : describe(first);
}
