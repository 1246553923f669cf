import type { FloorplanInput, PointUm } from '#lib/floorplan/index.ts';
import type { Bounds } from '#lib/geometry/index.ts';
import { blockBounds, type Domain } from './domains.ts';

type BlockInput = NonNullable<FloorplanInput['blocks']>[number];

/** Blocks that draw more than their area would say, by how much, in the heaviest mode. */
const HOT: Readonly<Record<string, number>> = { alu1: 2.1, mac1: 1.7, sram3: 1.4 };

/** Columns and rows of the current map that some blocks carry. */
const MAP_COLUMNS = 8;
const MAP_ROWS = 6;

function rectangle({ minX, minY, maxX, maxY }: Bounds): PointUm[] {
	return [
		[minX, minY],
		[maxX, minY],
		[maxX, maxY],
		[minX, maxY]
	];
}

/** The rectangle without its upper right ninth: blocks are not all boxes. */
function ell({ minX, minY, maxX, maxY }: Bounds): PointUm[] {
	const notchX = Math.round(maxX - (maxX - minX) / 3);
	const notchY = Math.round(maxY - (maxY - minY) / 3);
	return [
		[minX, minY],
		[maxX, minY],
		[maxX, notchY],
		[notchX, notchY],
		[notchX, maxY],
		[minX, maxY]
	];
}

/** One warm spot over an even floor, as clocked logic shows it. */
function warmSpot(random: () => number): BlockInput['spread'] {
	const centreColumn = 1 + random() * (MAP_COLUMNS - 2);
	const centreRow = 1 + random() * (MAP_ROWS - 2);
	const weights: number[] = [];
	for (let row = 0; row < MAP_ROWS; row++) {
		for (let column = 0; column < MAP_COLUMNS; column++) {
			const distance2 = (column + 0.5 - centreColumn) ** 2 + (row + 0.5 - centreRow) ** 2;
			weights.push(Math.round((0.5 + 2 * Math.exp(-distance2 / 2.5)) * 1000) / 1000);
		}
	}
	return { kind: 'map', columns: MAP_COLUMNS, rows: MAP_ROWS, weights };
}

/** Amperes to a millionth, so that the file stays readable. */
export function roundAmps(amps: number): number {
	return Math.round(amps * 1e6) / 1e6;
}

/** The domain's blocks; their currents in each mode add up to about the domain's. */
export function domainBlocks(domain: Domain, random: () => number): BlockInput[] {
	const bounds = blockBounds(domain);
	const drafts = domain.blocks.flatMap((names, row) =>
		names.map((name, column) => ({
			name,
			bounds: bounds[row][column],
			appetite: 0.6 + 0.8 * random()
		}))
	);
	const total = drafts.reduce((sum, draft) => sum + draft.appetite * (HOT[draft.name] ?? 1), 0);
	return drafts.map(({ name, bounds: box, appetite }) => {
		const share = (appetite * (HOT[name] ?? 1)) / total;
		return {
			id: `${domain.net.replace('vdd_', '')}.${name}`,
			net: domain.net,
			outline: name === 'secure' || name === 'stream' ? ell(box) : rectangle(box),
			amps: Object.fromEntries(
				Object.entries(domain.amps).map(([mode, amps]) => [mode, roundAmps(amps * share)])
			),
			spread: name === 'alu1' || name === 'mac1' ? warmSpot(random) : 'uniform',
			// A converter inside it holds its power, so it draws more as its rail sags.
			voltageExponent: name === 'dma' ? -1 : domain.voltageExponent
		};
	});
}
