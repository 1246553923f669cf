import { describe, expect, it } from 'vitest';
import { hashFloorplan, parseFloorplan } from '#lib/floorplan/index.ts';
import { applyOperations } from '#lib/floorplan/edits/index.ts';
import { checkAllPlacements } from '#lib/floorplan/legality/index.ts';
import { makeDemoFloorplan, makeDemoHistory } from './index.ts';

const history = makeDemoHistory();

describe('history of the demo floorplan', () => {
	it('ends at the demo floorplan itself', () => {
		expect(hashFloorplan(history.draft)).toBe(hashFloorplan(makeDemoFloorplan()));
	});

	it.each([
		['first', 'toSecond', 'second'],
		['second', 'toDraft', 'draft']
	] as const)('%s: the edits %s lead to %s', (from, steps, to) => {
		let plan = history[from];
		for (const { edit } of history[steps]) {
			const applied = applyOperations(plan, edit.operations);
			expect(applied.status, edit.label).toBe('applied');
			if (applied.status === 'applied') plan = applied.floorplan;
		}
		expect(hashFloorplan(plan)).toBe(hashFloorplan(history[to]));
	});

	it.each(['first', 'second', 'draft'] as const)(
		'%s is a valid document, placed legally',
		(name) => {
			const plan = history[name];
			expect(parseFloorplan(JSON.parse(JSON.stringify(plan))).status).toBe('parsed');
			expect(checkAllPlacements(plan)).toEqual([]);
		}
	);

	it('leaves drawing to the placer; the analyst changes loads and modes alone', () => {
		const lists = [...history.toSecond, ...history.toDraft]
			.filter(({ by }) => by === 'analyst')
			.flatMap(({ edit }) =>
				edit.operations.map((operation) => 'list' in operation && operation.list)
			);
		expect([...new Set(lists)]).toEqual(['blocks', 'modes']);
	});
});
