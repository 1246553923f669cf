import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import {
	formatProblems,
	parseFloorplanText,
	type Floorplan,
	type ItemList
} from '#lib/floorplan/index.ts';
import { applyOperations, changeEach, frameOf } from '#lib/floorplan/edits/index.ts';
import { fieldsOf, sharedValue, type InspectedItem } from './fields.ts';

const parsed = parseFloorplanText(readFileSync('tests/fixtures/floorplan-version-1.json', 'utf8'));
if (parsed.status !== 'parsed') throw new Error(formatProblems(parsed.problems).join('\n'));
const { floorplan } = parsed;

function fieldOf(list: ItemList, key: string, plan: Floorplan = floorplan) {
	const field = fieldsOf(list, plan, plan[list]).find((one) => one.key === key);
	if (!field) throw new Error(`no field ${key}`);
	return field;
}

/** Sets a field of all items of a list, as the inspector does. */
function edited(list: ItemList, key: string, value: unknown): Floorplan {
	const { field, write } = fieldOf(list, key);
	const ids = floorplan[list].map(({ id }) => id);
	const { operations } = changeEach(floorplan, list, ids, field, (item) =>
		write(item as InspectedItem, value)
	);
	const result = applyOperations(floorplan, operations);
	if (result.status !== 'applied') throw new Error(result.status);
	return result.floorplan;
}

describe('fields of the inspector', () => {
	it('says that items differ (UX-20)', () => {
		const items = [{ name: 'a', volts: 1 }, { name: 'b', volts: 1 }, { volts: 1 }];
		expect(sharedValue(items, fieldOf('nets', 'name'))).toBeUndefined();
		expect(sharedValue(items, fieldOf('nets', 'volts'))).toBe(1);
		expect(sharedValue([{}, {}], fieldOf('nets', 'name'))).toBeNull();
	});

	it('changes only the width of outlines (UX-20)', () => {
		const after = edited('blocks', 'widthUm', 12.5);
		for (const [k, { outline }] of after.blocks.entries()) {
			expect(frameOf(outline)).toEqual({
				...frameOf(floorplan.blocks[k].outline),
				widthUm: 12.5
			});
		}
	});

	it('sets and takes away the current of one mode and leaves the others', () => {
		const mode = floorplan.modes[0].id;
		const set = edited('blocks', `amps.${mode}`, 0.0042);
		const without = edited('blocks', `amps.${mode}`, undefined);
		for (const [k, { amps }] of floorplan.blocks.entries()) {
			expect(set.blocks[k].amps).toEqual({ ...amps, [mode]: 0.0042 });
			const { [mode]: _taken, ...others } = amps;
			expect(without.blocks[k].amps).toEqual(others);
		}
	});

	it('offers an ideal input and writes it as null', () => {
		const after = edited('regulators', 'input', '');
		expect(after.regulators.map(({ input }) => input)).toEqual(
			floorplan.regulators.map(() => null)
		);
		expect(sharedValue(after.regulators, fieldOf('regulators', 'input', after))).toBe('');
	});

	it('refuses sizes of nothing before they reach the document', () => {
		const { input } = fieldOf('blocks', 'widthUm');
		expect(input.kind === 'quantity' && input.check?.(0)).toMatch(/more than 0/);
		expect(input.kind === 'quantity' && input.check?.(1)).toBeUndefined();
	});
});
