import { readFileSync } from 'node:fs';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
	formatProblems,
	hashFloorplan,
	parseFloorplanText,
	writeFloorplan,
	type Floorplan
} from '../index.ts';
import {
	addItems,
	applyOperations,
	changeField,
	duplicateItems,
	editSchema,
	findItem,
	moveItems,
	operationSchema,
	partsTouched,
	referrersOf,
	removeItems,
	setProperty,
	type EditDraft,
	type Operation
} from './index.ts';

function example(): Floorplan {
	const result = parseFloorplanText(
		readFileSync('tests/fixtures/floorplan-version-1.json', 'utf8')
	);
	if (result.status !== 'parsed') throw new Error(formatProblems(result.problems).join('\n'));
	return result.floorplan;
}

function applied(floorplan: Floorplan, operations: readonly Operation[]): Floorplan {
	const result = applyOperations(floorplan, operations);
	if (result.status !== 'applied') throw new Error(JSON.stringify(result));
	return result.floorplan;
}

const everything = [
	{ list: 'regulators', id: 'R1' },
	{ list: 'regulators', id: 'R2' },
	{ list: 'feeds', id: 'bump' },
	{ list: 'blocks', id: 'cpu' }
] as const;

/** One of many actions on whatever the document holds. */
const actions: fc.Arbitrary<(floorplan: Floorplan) => EditDraft> = fc.oneof(
	fc.tuple(fc.integer({ min: -9999, max: 9999 }), fc.integer({ min: -9999, max: 9999 })).map(
		([dx, dy]) =>
			(f: Floorplan) =>
				moveItems(f, everything, dx / 1000, dy / 1000)
	),
	fc.nat(3).map((k) => (f: Floorplan) => removeItems(f, [everything[k]])),
	fc.nat(3).map((k) => (f: Floorplan) => duplicateItems(f, [everything[k], everything[0]], 5, 5)),
	fc.nat(50).map(
		(mv) => (f: Floorplan) =>
			changeField(
				f,
				'regulators',
				f.regulators.map(({ id }) => id),
				'offsetV',
				mv / 1000
			)
	),
	fc.nat(9).map((k) => (f: Floorplan) => setProperty(f, 'limits', { dropV: k / 100 })),
	fc.constant((f: Floorplan) => setProperty(f, 'name', undefined))
);

describe('applyOperations', () => {
	it('undoing any run of actions gives the first document, redoing the last', () => {
		fc.assert(
			fc.property(fc.array(actions, { maxLength: 12 }), (steps) => {
				const start = example();
				let floorplan = start;
				const back: Operation[][] = [];
				for (const step of steps) {
					const result = applyOperations(floorplan, step(floorplan).operations);
					if (result.status !== 'applied') continue;
					floorplan = result.floorplan;
					back.push(result.inverse);
				}
				const end = hashFloorplan(floorplan);
				const again: Operation[][] = [];
				for (const operations of back.reverse()) {
					const result = applyOperations(floorplan, operations);
					if (result.status !== 'applied') throw new Error(JSON.stringify(result));
					floorplan = result.floorplan;
					again.push(result.inverse);
				}
				expect(hashFloorplan(floorplan)).toBe(hashFloorplan(start));
				for (const operations of again.reverse()) floorplan = applied(floorplan, operations);
				expect(hashFloorplan(floorplan)).toBe(end);
			}),
			{ numRuns: 100 }
		);
	});

	it('the inverse holds what stands in the document: defaults filled in, lengths on the grid', () => {
		const start = example();
		const result = applyOperations(start, [
			{
				op: 'insert',
				list: 'feeds',
				index: 99,
				item: { id: 'new', net: 'vin', xUm: 1.00000004, yUm: 2, seriesOhm: 0 }
			},
			{
				op: 'insert',
				list: 'regulators',
				index: 99,
				item: { id: 'R3', cell: 'weir', input: null, output: 'core', xUm: 5, yUm: 5 }
			},
			{ op: 'change', list: 'regulators', id: 'R3', field: 'xUm', from: 5, to: 9.99999996 },
			{ op: 'remove', list: 'blocks', index: 7, item: start.blocks[0] }
		]);
		if (result.status !== 'applied') throw new Error(JSON.stringify(result));
		expect(result.inverse).toEqual([
			{ op: 'insert', list: 'blocks', index: 0, item: start.blocks[0] },
			{ op: 'change', list: 'regulators', id: 'R3', field: 'xUm', from: 10, to: 5 },
			{
				op: 'remove',
				list: 'regulators',
				index: 2,
				item: { ...result.floorplan.regulators[2], xUm: 5 }
			},
			{ op: 'remove', list: 'feeds', index: 2, item: { ...result.floorplan.feeds[2], xUm: 1 } }
		]);
		expect(hashFloorplan(applied(result.floorplan, result.inverse))).toBe(hashFloorplan(start));
	});

	it('an id does not change, and the last mode stays', () => {
		const start = example();
		expect(
			applyOperations(start, changeField(start, 'regulators', ['R1'], 'id', 'a b').operations)
		).toMatchObject({ status: 'refused', problems: [{ path: 'regulators[0] (R1).id' }] });
		const idle = applied(start, changeField(start, 'blocks', ['cpu'], 'amps', {}).operations);
		expect(
			applyOperations(idle, removeItems(idle, [{ list: 'modes', id: 'run' }]).operations)
		).toMatchObject({ status: 'refused', problems: [{ path: 'modes' }] });
	});

	it('a field that every object inherits is unknown like any other', () => {
		const start = example();
		const operations: Operation[] = [
			{ op: 'change', list: 'regulators', id: 'R1', field: 'constructor', to: 1 }
		];
		expect(applyOperations(start, operations)).toMatchObject({
			status: 'refused',
			problems: [{ path: 'regulators[0] (R1).constructor' }]
		});
	});

	it('edits of different objects commute', () => {
		const one: fc.Arbitrary<(f: Floorplan, id: string) => EditDraft> = fc.oneof(
			fc.tuple(fc.integer({ min: -9999, max: 9999 }), fc.integer({ min: -9999, max: 9999 })).map(
				([dx, dy]) =>
					(f: Floorplan, id: string) =>
						moveItems(f, [{ list: 'regulators', id }], dx / 1000, dy / 1000)
			),
			fc
				.nat(99)
				.map(
					(mv) => (f: Floorplan, id: string) =>
						changeField(f, 'regulators', [id], 'offsetV', mv / 1000)
				),
			fc
				.boolean()
				.map(
					(enabled) => (f: Floorplan, id: string) =>
						changeField(f, 'regulators', [id], 'enabled', enabled)
				),
			fc.constant((f: Floorplan, id: string) => removeItems(f, [{ list: 'regulators', id }]))
		);
		fc.assert(
			fc.property(one, one, (first, second) => {
				const start = example();
				const a = first(start, 'R1').operations;
				const b = second(start, 'R2').operations;
				expect(hashFloorplan(applied(applied(start, a), b))).toBe(
					hashFloorplan(applied(applied(start, b), a))
				);
			})
		);
	});

	it('50 times to a file and back leaves every value as it was (UX-21)', () => {
		let floorplan = applied(example(), moveItems(example(), everything, 0.017, -0.003).operations);
		const first = hashFloorplan(floorplan);
		for (let k = 0; k < 50; k++) {
			const result = parseFloorplanText(writeFloorplan(floorplan));
			if (result.status !== 'parsed') throw new Error(JSON.stringify(result));
			floorplan = result.floorplan;
		}
		expect(hashFloorplan(floorplan)).toBe(first);
	});

	it('what is removed together with all that uses it, or put back, is no problem', () => {
		const start = example();
		const both = removeItems(start, [...everything.slice(0, 2), { list: 'cells', id: 'weir' }]);
		expect(applied(start, both.operations).cells).toEqual([]);
		const [cell] = start.cells;
		const replaced: Operation[] = [
			{ op: 'remove', list: 'cells', index: 0, item: cell },
			{ op: 'insert', list: 'cells', index: 0, item: { ...cell, maxA: 1 } }
		];
		expect(applied(start, replaced).cells[0].maxA).toBe(1);
	});

	it('names who uses an item: lists, records and limits', () => {
		const start = applied(
			example(),
			setProperty(example(), 'limits', { overrides: { nets: { core: { dropV: 0.01 } } } })
				.operations
		);
		const users = (list: 'nets' | 'layers' | 'modes', id: string) =>
			referrersOf(start, [{ list, id }]).map(({ from }) => from?.id ?? 'limits');
		expect(users('nets', 'core')).toEqual(['core.M1', 'core.M2', 'R1', 'R2', 'cpu', 'limits']);
		expect(users('modes', 'run')).toEqual(['cpu']);
		expect(users('layers', 'M1')).toEqual(['V1', 'core.M1', 'gnd.M1', 'vin.M1']);
	});

	it('10,000 nudges out and back leave no drift (UX-21)', () => {
		const start = example();
		let floorplan = start;
		for (const step of [0.001, -0.001]) {
			for (let k = 0; k < 5000; k++) {
				floorplan = applied(
					floorplan,
					moveItems(floorplan, [everything[0]], step, step).operations
				);
			}
		}
		expect(hashFloorplan(floorplan)).toBe(hashFloorplan(start));
	});

	it('items that are not touched keep their identity', () => {
		const start = example();
		const next = applied(start, moveItems(start, [everything[0]], 5, 5).operations);
		expect(next.blocks).toBe(start.blocks);
		expect(next.regulators[1]).toBe(start.regulators[1]);
		expect(start.regulators[0].xUm).toBe(40);
	});

	it('a field that somebody else has changed is a conflict with both values', () => {
		const start = example();
		const mine = changeField(start, 'regulators', ['R1'], 'offsetV', 0.001).operations;
		const theirs = applied(
			start,
			changeField(start, 'regulators', ['R1'], 'offsetV', 0.002).operations
		);
		expect(applyOperations(theirs, mine)).toEqual({
			status: 'conflict',
			conflicts: [
				{
					operation: 0,
					list: 'regulators',
					id: 'R1',
					field: 'offsetV',
					mine: 0.001,
					theirs: 0.002,
					reason: 'changed'
				}
			]
		});
	});

	it('removing what somebody changed, changing what is gone, adding a taken id are conflicts', () => {
		const start = example();
		const removal = removeItems(start, [everything[0]]).operations;
		const changed = applied(start, moveItems(start, [everything[0]], 5, 0).operations);
		const gone = applied(start, removal);
		const twin = addItems(start, 'regulators', [start.regulators[0]]).operations;
		const move = moveItems(start, [everything[0]], 5, 0).operations;
		const reasons = [
			applyOperations(changed, removal),
			applyOperations(gone, move),
			applyOperations(start, twin)
		].map((result) => result.status === 'conflict' && result.conflicts[0].reason);
		expect(reasons).toEqual(['changed', 'gone', 'taken']);
	});

	it('refuses what the format refuses, with the path, and changes nothing', () => {
		const start = example();
		expect(
			applyOperations(start, changeField(start, 'cells', ['weir'], 'maxA', -1).operations)
		).toMatchObject({
			status: 'refused',
			problems: [{ path: 'cells[0] (weir).maxA' }]
		});
		expect(
			applyOperations(start, removeItems(start, [{ list: 'cells', id: 'weir' }]).operations)
		).toMatchObject({
			status: 'refused',
			problems: [
				{
					path: 'cells (weir)',
					message:
						'is used by regulator R1, regulator R2 (expected to change or remove what uses it first)'
				}
			]
		});
		expect(
			applyOperations(start, changeField(start, 'regulators', ['R1'], 'colour', 'red').operations)
		).toMatchObject({
			status: 'refused',
			problems: [{ path: 'regulators[0] (R1).colour' }]
		});
	});

	it('values nested without end, or with a key __proto__, are no operations', () => {
		let deep: unknown = 0;
		for (let k = 0; k < 100_000; k++) deep = [deep];
		const hostile: unknown = JSON.parse('{ "id": "x", "__proto__": { "fixed": true } }');
		const [one, two] = [
			{ op: 'change', list: 'nets', id: 'core', field: 'volts', from: deep, to: 1 },
			{ op: 'insert', list: 'nets', index: 0, item: hostile }
		].map((operation) => operationSchema.safeParse(operation));
		expect([one.success, two.success]).toEqual([false, false]);
	});

	it('operations survive a journey as JSON', () => {
		const start = example();
		const edit = {
			id: '0b9ad2ba-33c8-4e5e-9c9d-35a7a0b0f3a1',
			...moveItems(start, everything, 1, 2)
		};
		const received = editSchema.parse(JSON.parse(JSON.stringify(edit)));
		expect(hashFloorplan(applied(start, received.operations))).toBe(
			hashFloorplan(applied(start, edit.operations))
		);
		expect(partsTouched(received.operations)).toEqual(new Set(['regulators', 'feeds', 'blocks']));
	});
});

describe('actions', () => {
	it('a fixed regulator is neither moved nor removed', () => {
		const start = applied(
			example(),
			changeField(example(), 'regulators', ['R1'], 'fixed', true).operations
		);
		expect(moveItems(start, [everything[0]], 5, 5).operations).toEqual([]);
		expect(removeItems(start, [everything[0]]).operations).toEqual([]);
	});

	it('copies get ids of their own and stand apart from their originals', () => {
		const start = example();
		const first = duplicateItems(start, [everything[0]], 5, 5);
		const second = duplicateItems(applied(start, first.operations), [everything[0]], 10, 10);
		expect([...first.copies, ...second.copies].map(({ id }) => id)).toEqual(['R1_2', 'R1_3']);
		expect(findItem(applied(start, first.operations), 'regulators', 'R1_2')).toMatchObject({
			xUm: 45,
			yUm: 45
		});
	});
});
