import type { Floorplan } from '#lib/floorplan/index.ts';
import type { ResultFile } from '#lib/results/index.ts';
import { formatQuantity, type Unit } from '#lib/units/index.ts';
import type { DataColumn } from '#lib/components/ui/DataTable.svelte';

type State = ResultFile['regulators'][number]['state'];

export interface RegulatorRow {
	readonly id: string;
	readonly cell: string;
	readonly net: string;
	readonly amps: number | null;
	readonly loadFraction: number | null;
	readonly state: State | null;
	readonly headroomV: number | null;
	readonly lossW: number | null;
	readonly setV: number | null;
	readonly outV: number | null;
	readonly inV: number | null;
}

export interface BlockRow {
	readonly id: string;
	readonly net: string;
	readonly amps: number;
	readonly worstDropV: number | null;
	readonly netDropV: number | null;
	readonly groundRiseV: number | null;
	readonly marginV: number | null;
	readonly minV: number | null;
}

export interface FeedRow {
	readonly id: string;
	readonly net: string;
	readonly xUm: number;
	readonly yUm: number;
	readonly amps: number | null;
	readonly loadFraction: number | null;
}

function byId<T extends { readonly id: string }>(list: readonly T[] | undefined): Map<string, T> {
	return new Map(list?.map((item) => [item.id, item]));
}

/** The regulators of a floorplan with what a result says of each. */
export function regulatorRows(floorplan: Floorplan, result: ResultFile | null): RegulatorRow[] {
	const found = byId(result?.regulators);
	return floorplan.regulators.map(({ id, cell, output, enabled }) => {
		const reading = found.get(id);
		return {
			id,
			cell,
			net: output,
			amps: reading?.amps ?? null,
			loadFraction: reading?.loadFraction ?? null,
			state: reading?.state ?? (enabled ? null : 'off'),
			headroomV: reading?.headroomV ?? null,
			lossW: reading?.lossW ?? null,
			setV: reading?.setV ?? null,
			outV: reading?.outV ?? null,
			inV: reading?.inV ?? null
		};
	});
}

/** The blocks of a floorplan; before a solve with the current that the mode asks for. */
export function blockRows(
	floorplan: Floorplan,
	result: ResultFile | null,
	modeId: string
): BlockRow[] {
	const found = byId(result?.blocks);
	return floorplan.blocks.map(({ id, net, amps }) => {
		const reading = found.get(id);
		return {
			id,
			net,
			amps: reading?.amps ?? amps[modeId] ?? 0,
			worstDropV: reading?.worstDropV ?? null,
			netDropV: reading?.netDropV ?? null,
			groundRiseV: reading?.groundRiseV ?? null,
			marginV: reading?.marginV ?? null,
			minV: reading?.minV ?? null
		};
	});
}

export function feedRows(floorplan: Floorplan, result: ResultFile | null): FeedRow[] {
	const found = byId(result?.feeds);
	return floorplan.feeds.map(({ id, net, xUm, yUm }) => ({
		id,
		net,
		xUm,
		yUm,
		amps: found.get(id)?.amps ?? null,
		loadFraction: found.get(id)?.loadFraction ?? null
	}));
}

const DIGITS = 4;
/** Columns are read downwards: one prefix for all of a column. */
const MILLI = 1e-3;

/** A column of quantities shown in thousandths, whose unit stands in the header. */
function milliColumn<Row>(
	id: string,
	header: string,
	unit: Unit,
	symbol: string,
	read: (row: Row) => number | null
): DataColumn<Row> {
	return {
		id,
		header,
		unit: symbol,
		isNumeric: true,
		value: (row) => {
			const value = read(row);
			return value === null ? null : value / MILLI;
		},
		text: (row) => {
			const value = read(row);
			if (value === null) return '–';
			return formatQuantity(value, unit, { digits: DIGITS, factor: MILLI }).replace(/ \S+$/, '');
		}
	};
}

function percentColumn<Row>(read: (row: Row) => number | null): DataColumn<Row> {
	return {
		id: 'load',
		header: 'Load',
		unit: '%',
		isNumeric: true,
		value: (row) => {
			const value = read(row);
			return value === null ? null : value * 100;
		},
		text: (row) => {
			const value = read(row);
			return value === null ? '–' : formatQuantity(value, 'fraction', { digits: 3 });
		}
	};
}

export const regulatorColumns: readonly DataColumn<RegulatorRow>[] = [
	{ id: 'id', header: 'Regulator', value: ({ id }) => id },
	{ id: 'net', header: 'Net', value: ({ net }) => net },
	{ id: 'cell', header: 'Cell', value: ({ cell }) => cell },
	{ id: 'state', header: 'State', value: ({ state }) => state },
	milliColumn('amps', 'Current', 'A', 'mA', ({ amps }) => amps),
	percentColumn(({ loadFraction }) => loadFraction),
	milliColumn('headroom', 'Headroom', 'V', 'mV', ({ headroomV }) => headroomV),
	milliColumn('loss', 'Loss', 'W', 'mW', ({ lossW }) => lossW),
	milliColumn('set', 'Set point', 'V', 'mV', ({ setV }) => setV),
	milliColumn('out', 'Output', 'V', 'mV', ({ outV }) => outV),
	milliColumn('in', 'Input', 'V', 'mV', ({ inV }) => inV)
];

export const blockColumns: readonly DataColumn<BlockRow>[] = [
	{ id: 'id', header: 'Block', value: ({ id }) => id },
	{ id: 'net', header: 'Net', value: ({ net }) => net },
	milliColumn('amps', 'Current', 'A', 'mA', ({ amps }) => amps),
	milliColumn('drop', 'Worst drop', 'V', 'mV', ({ worstDropV }) => worstDropV),
	milliColumn('netDrop', 'Net side', 'V', 'mV', ({ netDropV }) => netDropV),
	milliColumn('groundRise', 'Ground side', 'V', 'mV', ({ groundRiseV }) => groundRiseV),
	milliColumn('margin', 'Margin', 'V', 'mV', ({ marginV }) => marginV),
	milliColumn('min', 'Lowest supply', 'V', 'mV', ({ minV }) => minV)
];

export const feedColumns: readonly DataColumn<FeedRow>[] = [
	{ id: 'id', header: 'Bump', value: ({ id }) => id },
	{ id: 'net', header: 'Net', value: ({ net }) => net },
	{ id: 'x', header: 'x', unit: 'µm', isNumeric: true, value: ({ xUm }) => xUm },
	{ id: 'y', header: 'y', unit: 'µm', isNumeric: true, value: ({ yUm }) => yUm },
	milliColumn('amps', 'Current', 'A', 'mA', ({ amps }) => amps),
	percentColumn(({ loadFraction }) => loadFraction)
];
