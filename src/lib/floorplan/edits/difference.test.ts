import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { hashFloorplan, type Floorplan } from '#lib/floorplan/index.ts';
import { makeDemoFloorplan } from '#lib/demo/index.ts';
import { applyOperations } from './apply.ts';
import { operationsBetween } from './difference.ts';

const plan = makeDemoFloorplan(7, 4);

/** The plan with some of its regulators and blocks, in some order, some of them changed. */
const variants: fc.Arbitrary<Floorplan> = fc
	.record({
		regulators: fc.shuffledSubarray(plan.regulators.slice(0, 12)),
		offsets: fc.array(fc.integer({ min: -5, max: 5 }), { minLength: 12, maxLength: 12 }),
		name: fc.option(fc.constantFrom('One', 'Other'), { nil: undefined }),
		blocks: fc.subarray(plan.blocks.slice(0, 6))
	})
	.map(({ regulators, offsets, name, blocks }) => {
		const { name: _name, ...rest } = plan;
		return {
			...rest,
			...(name === undefined ? {} : { name }),
			regulators: regulators.map((unit, index) => ({ ...unit, offsetV: offsets[index] / 1000 })),
			blocks
		};
	});

describe('operationsBetween', () => {
	it('lead from one document to the other, order of the lists included', () => {
		fc.assert(
			fc.property(variants, variants, (from, to) => {
				const applied = applyOperations(from, operationsBetween(from, to));
				expect(applied.status).toBe('applied');
				if (applied.status !== 'applied') return;
				expect(hashFloorplan(applied.floorplan)).toBe(hashFloorplan(to));
				const back = applyOperations(applied.floorplan, applied.inverse);
				expect(back.status === 'applied' && hashFloorplan(back.floorplan)).toBe(
					hashFloorplan(from)
				);
			}),
			{ numRuns: 60 }
		);
	});

	it('are none between a document and itself', () => {
		expect(operationsBetween(plan, plan)).toEqual([]);
	});

	it('name only the field that differs', () => {
		const [first, ...rest] = plan.regulators;
		const moved = { ...plan, regulators: [{ ...first, xUm: first.xUm + 5 }, ...rest] };
		expect(operationsBetween(plan, moved)).toEqual([
			{
				op: 'change',
				list: 'regulators',
				id: first.id,
				field: 'xUm',
				from: first.xUm,
				to: first.xUm + 5
			}
		]);
	});
});
