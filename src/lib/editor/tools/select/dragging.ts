import { moveItems, type ItemReference } from '#lib/floorplan/edits/index.ts';
import type { PointerInput } from '../../input.ts';
import { keyOf } from '../../selection.ts';
import { snapMove } from '../../snapping.ts';
import type { ToolHost, ToolState } from '../tool.ts';
import type { SelectTransitions } from './transitions.ts';

/**
 * The selection follows the pointer. Every step is computed from where the drag began, never from
 * the last one, so that nothing drifts; giving up leaves document and history untouched.
 */
export function dragging(
	host: ToolHost,
	go: SelectTransitions,
	start: PointerInput,
	grabbed: ItemReference
): ToolState {
	const moving = host.selected.filter((item) => host.canMove(item));
	const keys = new Set(moving.map(keyOf));
	// Whatever the hand holds, regulators come to rest on sites.
	const anchor =
		grabbed.list === 'regulators'
			? grabbed
			: (moving.find(({ list }) => list === 'regulators') ?? grabbed);
	const neighbours = host.neighbours(moving);
	let distance: readonly [number, number] = [0, 0];
	const end = () => {
		host.showOverlay({});
		go.idle();
	};
	return {
		name: 'select.dragging',
		pointerMove({ point, isFree }) {
			const { pxPerUm } = host.camera;
			const { dxUm, dyUm, guides } = snapMove({
				floorplan: host.floorplan,
				grabbed: anchor,
				dxUm: (point[0] - start.point[0]) / pxPerUm,
				dyUm: -(point[1] - start.point[1]) / pxPerUm,
				bounds: host.scene.boundsOf(keyOf(anchor)),
				neighbours,
				pxPerUm,
				isSuspended: isFree
			});
			distance = [dxUm, dyUm];
			const reasons = host.reasonsAfterMove(moving, dxUm, dyUm);
			host.showOverlay({ drag: { keys, dxUm, dyUm, reasons, guides } });
		},
		pointerUp(input) {
			this.pointerMove?.(input);
			end();
			host.execute(moveItems(host.floorplan, moving, ...distance));
		},
		cancel: end
	};
}
