import type { Floorplan, Regulator } from '#lib/floorplan/index.ts';
import {
	applyOperations,
	changeEach,
	changeField,
	moveItems,
	type EditDraft
} from '#lib/floorplan/edits/index.ts';
import { roundAmps } from './blocks.ts';
import { DEMO_SEED, makeDemoFloorplan } from './floorplan.ts';
import { storyRegulators } from './regulators.ts';

/** Regulators that stood further right before the placer moved them under the blocks they feed. */
const MOVED = ['core_2_1', 'core_2_2', 'core_2_3', 'core_2_4'];
const MOVED_UM = 150;
/** The first estimate of the blocks' currents against the present one; sleep was right from the start. */
const FIRST_ESTIMATE = 0.75;
/** Input of the burst mode before anybody asked what a low battery brings, V. */
const FIRST_BURST_V = 1.32;

export interface DemoStep {
	readonly by: 'placer' | 'analyst';
	readonly edit: EditDraft;
}

/** How the demo's floorplan came about: three plans and the edits that lead from each to the next. */
export interface DemoHistory {
	/** Light currents, a full battery, nothing trimmed: it holds every limit. */
	readonly first: Floorplan;
	readonly toSecond: readonly DemoStep[];
	/** The currents and the battery of today: it breaks limits. */
	readonly second: Floorplan;
	readonly toDraft: readonly DemoStep[];
	/** The plan as `makeDemoFloorplan` makes it. */
	readonly draft: Floorplan;
}

/** A unit of the story before anything happened to it: in service, or not trimmed yet. */
function untold({ enabled }: Regulator): Partial<Regulator> {
	return enabled ? { offsetV: 0 } : { enabled: true };
}

function before(draft: Floorplan): Floorplan {
	return {
		...draft,
		regulators: draft.regulators.map((unit) => ({
			...unit,
			...(storyRegulators.includes(unit.id) ? untold(unit) : {}),
			...(MOVED.includes(unit.id) ? { xUm: unit.xUm + MOVED_UM } : {})
		}))
	};
}

function atFirst(second: Floorplan): Floorplan {
	return {
		...second,
		regulators: second.regulators.map((unit) => ({ ...unit, offsetV: 0 })),
		modes: second.modes.map((mode) =>
			mode.id === 'burst' ? { ...mode, inputVolts: { vin: FIRST_BURST_V } } : mode
		),
		blocks: second.blocks.map((block) => ({
			...block,
			amps: Object.fromEntries(
				Object.entries(block.amps).map(([mode, amps]) => [
					mode,
					mode === 'sleep' ? amps : roundAmps(amps * FIRST_ESTIMATE)
				])
			)
		}))
	};
}

/** The plan after an edit, which is expected to fit. */
function after(plan: Floorplan, { label, operations }: EditDraft): Floorplan {
	const result = applyOperations(plan, operations);
	if (result.status !== 'applied') throw new Error(`demo edit "${label}" does not fit`);
	return result.floorplan;
}

/** The story of the demo's floorplan; the same seed tells the same story. */
export function makeDemoHistory(seed: number = DEMO_SEED, pitchScale = 1): DemoHistory {
	const draft = makeDemoFloorplan(seed, pitchScale);
	const second = before(draft);
	const first = atFirst(second);
	const unitOf = (plan: Floorplan, id: string) => {
		const unit = plan.regulators.find((one) => one.id === id);
		if (!unit) throw new Error(`the demo has no regulator ${id}`);
		return unit;
	};

	let plan = first;
	const step = (by: DemoStep['by'], edit: EditDraft): DemoStep => {
		plan = after(plan, edit);
		return { by, edit };
	};
	const ids = (list: readonly { readonly id: string }[]) => list.map(({ id }) => id);
	const toSecond = [
		step(
			'analyst',
			changeEach(plan, 'blocks', ids(plan.blocks), 'amps', ({ id }) => {
				return second.blocks.find((block) => block.id === id)?.amps;
			})
		),
		step(
			'analyst',
			changeField(
				plan,
				'modes',
				['burst'],
				'inputVolts',
				second.modes.find(({ id }) => id === 'burst')?.inputVolts
			)
		),
		step(
			'placer',
			changeEach(
				plan,
				'regulators',
				ids(plan.regulators),
				'offsetV',
				({ id }) => unitOf(second, id).offsetV
			)
		)
	];
	const toDraft = [
		step(
			'placer',
			moveItems(
				plan,
				MOVED.map((id) => ({ list: 'regulators', id })),
				-MOVED_UM,
				0
			)
		),
		...storyRegulators.flatMap((id) =>
			(['offsetV', 'enabled'] as const)
				.filter((field) => unitOf(plan, id)[field] !== unitOf(draft, id)[field])
				.map((field) =>
					step('placer', changeField(plan, 'regulators', [id], field, unitOf(draft, id)[field]))
				)
		)
	];
	return { first, toSecond, second, toDraft, draft };
}
