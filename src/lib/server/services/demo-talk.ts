import type { AnchorInput, ProjectRole } from '#lib/contracts/index.ts';
import { windowArea } from '#lib/demo/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import type { Finding, ResultFile } from '#lib/results/index.ts';
import { formatQuantity } from '#lib/units/index.ts';

interface DemoComment {
	readonly by: ProjectRole;
	readonly text: string;
	/** How long ago, hours. */
	readonly hours: number;
}

export interface DemoThread {
	readonly anchor: AnchorInput;
	readonly comments: readonly DemoComment[];
	readonly resolved?: { readonly by: ProjectRole; readonly hours: number };
}

/** Whether a place is where the demo's input rail has no bumps. */
function isInWindow(atUm: Finding['atUm']): boolean {
	if (!atUm) return false;
	const [x, y] = atUm;
	const { minX, minY, maxX, maxY } = windowArea;
	return x >= minX && x <= maxX && y >= minY && y <= maxY;
}

/** Figures of findings in words, three digits. */
function volts(value: number): string {
	return formatQuantity(value, 'V', { digits: 3 });
}

function worst(findings: readonly Finding[], what: string): Finding {
	const [found] = [...findings].sort(
		(a, b) => Math.abs(b.value - b.limit) - Math.abs(a.value - a.limit)
	);
	if (!found) throw new Error(`the demo has no finding of ${what} to talk about`);
	return found;
}

/**
 * What the demo's people say about the revision that is returned. Every figure is read from its
 * results, every object and place is one that they name.
 */
export function revisionTalk(
	floorplan: Floorplan,
	results: readonly ResultFile[]
): readonly DemoThread[] {
	const hot = results.find(({ mode, corner }) => mode === 'burst' && corner === 'hot-thin');
	if (!hot) throw new Error('the demo has no result of burst in the hot corner');
	const drop = worst(
		hot.findings.filter(({ kind, list }) => kind === 'drop' && list === 'blocks'),
		'drop'
	);
	const core = hot.nets.find(({ id }) => id === 'vdd_core');
	if (!core) throw new Error('the demo has no core rail');
	const starved = worst(
		hot.findings.filter(({ kind, atUm }) => kind === 'headroom' && isInWindow(atUm)),
		'headroom beside the window'
	);
	const input = floorplan.modes.find(({ id }) => id === 'burst')?.inputVolts?.vin;
	const asleep = results.filter(({ mode }) => mode === 'sleep');
	const idle = new Set(
		asleep.flatMap(({ findings }) =>
			findings.flatMap(({ kind, subject }) => (kind === 'below-min-current' ? [subject] : []))
		)
	);
	return [
		{
			anchor: { kind: 'item', list: 'blocks', id: drop.subject },
			comments: [
				{
					by: 'analyst',
					hours: 71,
					text: `In burst, hot corner, ${drop.subject} sees a drop of ${volts(drop.value)}; its limit is ${volts(drop.limit)}. With the first estimate of the currents it held.`
				},
				{
					by: 'placer',
					hours: 70,
					text: 'The units in the channel below it stand too far right: its left side has only one of them near. I can move four.'
				}
			]
		},
		{
			anchor: { kind: 'place', xUm: core.worst.xUm, yUm: core.worst.yUm },
			comments: [
				{
					by: 'lead',
					hours: 51,
					text: `The weakest spot of the core rail, ${volts(core.worstDropV)}. Before anybody adds a unit: what does moving the nearest ones bring?`
				},
				{
					by: 'placer',
					hours: 25,
					text: 'Moved in the draft. Look at the same spot there; it is better, and whether it is enough we see from the solve.'
				}
			]
		},
		{
			anchor: { kind: 'item', list: 'regulators', id: starved.subject },
			comments: [
				{
					by: 'lead',
					hours: 50,
					text: `${starved.subject} has ${volts(Math.max(0, starved.value))} of headroom, asked for are ${volts(starved.limit)}.${
						input === undefined ? '' : ` The battery brings ${volts(input)} in this mode.`
					} Is that the battery alone, or the input rail as well?`
				},
				{
					by: 'analyst',
					hours: 48,
					text: 'Both. There are no input bumps under the sensor window, so the input rail sags towards it. I would ask for two bumps at its edge before we touch the cell.'
				}
			]
		},
		{
			anchor: { kind: 'plan' },
			comments: [
				{
					by: 'analyst',
					hours: 69,
					text: `Asleep, ${idle.size} of ${floorplan.regulators.length} regulators give less than their stable minimum in some corner.`
				},
				{
					by: 'lead',
					hours: 51,
					text: 'That is for the owner of the cell, not for placement: units that sleep have to be switched off in groups. It does not hold up the placement; the mode stays in.'
				}
			],
			resolved: { by: 'lead', hours: 50 }
		}
	];
}

/** What they say about the draft. */
export const draftTalk: readonly DemoThread[] = [
	{
		anchor: { kind: 'item', list: 'keepouts', id: 'pll' },
		comments: [
			{
				by: 'viewer',
				hours: 20,
				text: 'From the clock side: please leave this strip free of straps as well, as it is now.'
			},
			{ by: 'placer', hours: 19, text: 'It forbids regulators and straps. Noted, it stays.' }
		]
	}
];
