import fc from 'fast-check';
import { expect, it } from 'vitest';
import { EditorDriver, smallPlan } from '../../../tests/support/editor-driver.ts';

/** What a person may do next; places and items are taken modulo what there is. */
const actionArbitrary = fc.oneof(
	fc.record({
		kind: fc.constant('drag' as const),
		item: fc.nat(),
		dxUm: fc.integer({ min: -200, max: 200 }),
		dyUm: fc.integer({ min: -200, max: 200 }),
		alt: fc.boolean()
	}),
	fc.record({ kind: fc.constant('click' as const), item: fc.nat(), shift: fc.boolean() }),
	fc.record({
		kind: fc.constant('key' as const),
		key: fc.constantFrom(
			'ArrowLeft',
			'ArrowRight',
			'Shift+ArrowUp',
			'ArrowDown',
			'Mod+d',
			'Delete',
			'r',
			'm',
			'e',
			'l',
			'Mod+a',
			'Escape'
		)
	}),
	fc.record({ kind: fc.constant('pause' as const) })
);
type Action = typeof actionArbitrary extends fc.Arbitrary<infer T> ? T : never;

function perform(driver: EditorDriver, action: Action): void {
	const { floorplan } = driver.editor;
	const items = [
		...floorplan.regulators.map(({ id }) => ({ list: 'regulators' as const, id })),
		...floorplan.blocks.map(({ id }) => ({ list: 'blocks' as const, id })),
		...floorplan.feeds.map(({ id }) => ({ list: 'feeds' as const, id }))
	];
	switch (action.kind) {
		case 'drag': {
			if (items.length === 0) return;
			const [x, y] = driver.centreOf(items[action.item % items.length]);
			driver.drag([x, y], [x + action.dxUm, y + action.dyUm], { alt: action.alt });
			return;
		}
		case 'click':
			if (items.length === 0) return;
			driver.click(...driver.centreOf(items[action.item % items.length]), {
				shift: action.shift
			});
			return;
		case 'key':
			driver.key(action.key);
			return;
		case 'pause':
			driver.pause();
	}
}

it('any actions: undo all gives the first document, redo all the last, to the hash', () => {
	fc.assert(
		fc.property(fc.array(actionArbitrary, { minLength: 150, maxLength: 200 }), (actions) => {
			const driver = new EditorDriver(smallPlan());
			const first = driver.hash;
			for (const action of actions) {
				// Copies double with every select-all and duplicate: keep the plan small.
				const isFull = driver.editor.floorplan.regulators.length > 40;
				if (isFull && action.kind === 'key' && action.key === 'Mod+d') continue;
				perform(driver, action);
			}
			driver.editor.endBurst();
			const last = driver.hash;
			const steps = driver.edits.length;
			while (driver.editor.undoLabel !== null) driver.editor.undo();
			expect(driver.hash).toBe(first);
			expect(driver.edits).toHaveLength(2 * steps);
			while (driver.editor.redoLabel !== null) driver.editor.redo();
			expect(driver.hash).toBe(last);
		}),
		{ numRuns: 100, seed: 2_071_993 }
	);
}, 120_000);
