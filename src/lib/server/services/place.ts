import { onGridUm, type Floorplan, type ItemList } from '#lib/floorplan/index.ts';
import { findItem } from '#lib/floorplan/edits/index.ts';
import { footprintOf } from '#lib/floorplan/legality/index.ts';
import { boundsOf, type Bounds } from '#lib/geometry/index.ts';

function middleOf({ minX, minY, maxX, maxY }: Bounds): [number, number] {
	return [onGridUm((minX + maxX) / 2), onGridUm((minY + maxY) / 2)];
}

/** Where an item of a document stands, um: its middle. Null for what stands nowhere, or is not there. */
export function placeUmOf(
	floorplan: Floorplan,
	list: ItemList,
	id: string
): [number, number] | null {
	switch (list) {
		case 'regulators': {
			const unit = findItem(floorplan, list, id);
			if (!unit) return null;
			const cells = new Map(floorplan.cells.map((cell) => [cell.id, cell]));
			const footprint = footprintOf(cells, unit);
			return footprint ? middleOf(footprint) : [unit.xUm, unit.yUm];
		}
		case 'feeds': {
			const feed = findItem(floorplan, list, id);
			return feed ? [feed.xUm, feed.yUm] : null;
		}
		case 'blocks':
		case 'keepouts': {
			const item = findItem(floorplan, list, id);
			return item ? middleOf(boundsOf(item.outline)) : null;
		}
		case 'straps': {
			const strap = findItem(floorplan, list, id);
			return strap ? middleOf(boundsOf(strap.region ?? floorplan.die.outline)) : null;
		}
		default:
			return null;
	}
}
