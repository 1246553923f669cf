import type { Floorplan } from '#lib/floorplan/index.ts';
import type { FindingKind, RegulatorResult, ResultFile } from '#lib/results/index.ts';
import type { DataColumn } from '#lib/components/ui/data-column.ts';

export type RegulatorState = RegulatorResult['state'];

/** The states in words, as every screen says them. */
export const STATE_WORDS: Readonly<Record<RegulatorState, string>> = {
	regulating: 'regulating',
	limited: 'limited',
	idle: 'idle',
	dropout: 'drop-out',
	off: 'off'
};

export interface RegulatorRow {
	readonly id: string;
	readonly name: string | undefined;
	readonly cell: string;
	readonly net: string;
	readonly amps: number | null;
	readonly loadFraction: number | null;
	readonly state: RegulatorState | null;
	readonly headroomV: number | null;
	readonly lossW: number | null;
	readonly setV: number | null;
	readonly outV: number | null;
	readonly inV: number | null;
}

export interface BlockRow {
	readonly id: string;
	readonly name: string | undefined;
	readonly net: string;
	readonly amps: number;
	readonly worstDropV: number | null;
	readonly netDropV: number | null;
	readonly groundRiseV: number | null;
	readonly limitV: number | null;
	readonly marginV: number | null;
	readonly meanV: number | null;
	readonly minV: number | null;
}

export interface FeedRow {
	readonly id: string;
	readonly name: string | undefined;
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
	return floorplan.regulators.map(({ id, name, cell, output, enabled }) => {
		const reading = found.get(id);
		return {
			id,
			name,
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
	return floorplan.blocks.map(({ id, name, net, amps }) => {
		const reading = found.get(id);
		return {
			id,
			name,
			net,
			amps: reading?.amps ?? amps[modeId] ?? 0,
			worstDropV: reading?.worstDropV ?? null,
			netDropV: reading?.netDropV ?? null,
			groundRiseV: reading?.groundRiseV ?? null,
			limitV: reading?.limitV ?? null,
			marginV: reading?.marginV ?? null,
			meanV: reading?.meanV ?? null,
			minV: reading?.minV ?? null
		};
	});
}

export function feedRows(floorplan: Floorplan, result: ResultFile | null): FeedRow[] {
	const found = byId(result?.feeds);
	return floorplan.feeds.map(({ id, name, net, xUm, yUm }) => ({
		id,
		name,
		net,
		xUm,
		yUm,
		amps: found.get(id)?.amps ?? null,
		loadFraction: found.get(id)?.loadFraction ?? null
	}));
}

/** Columns are read downwards: one prefix and one number of decimals for all of a column. */
const MILLI = 1e-3;
const PERCENT = 1e-2;

/** A column of quantities shown as multiples of a factor, whose unit stands in the header. */
function scaled<Row>(
	id: string,
	header: string,
	unit: string,
	factor: number,
	decimals: number,
	read: (row: Row) => number | null
): DataColumn<Row> {
	return {
		id,
		header,
		unit,
		decimals,
		isNumeric: true,
		value: (row) => {
			const value = read(row);
			return value === null ? null : value / factor;
		}
	};
}

const titled = ({ id, name }: { readonly id: string; readonly name?: string }) =>
	name ? `${id}, ${name}` : id;

export const regulatorColumns: readonly DataColumn<RegulatorRow>[] = [
	{ id: 'id', header: 'Regulator', value: titled },
	{ id: 'net', header: 'Net', value: ({ net }) => net },
	{ id: 'cell', header: 'Cell', value: ({ cell }) => cell },
	{
		id: 'state',
		header: 'State',
		value: ({ state }) => (state === null ? null : STATE_WORDS[state])
	},
	scaled('amps', 'Current', 'mA', MILLI, 2, ({ amps }) => amps),
	scaled('load', 'Load', '%', PERCENT, 1, ({ loadFraction }) => loadFraction),
	scaled('headroom', 'Headroom', 'mV', MILLI, 1, ({ headroomV }) => headroomV),
	scaled('loss', 'Loss', 'mW', MILLI, 2, ({ lossW }) => lossW),
	scaled('set', 'Set point', 'mV', MILLI, 1, ({ setV }) => setV),
	scaled('out', 'Output', 'mV', MILLI, 1, ({ outV }) => outV),
	scaled('in', 'Input', 'mV', MILLI, 1, ({ inV }) => inV)
];

export const blockColumns: readonly DataColumn<BlockRow>[] = [
	{ id: 'id', header: 'Block', value: titled },
	{ id: 'net', header: 'Net', value: ({ net }) => net },
	scaled('amps', 'Current', 'mA', MILLI, 2, ({ amps }) => amps),
	scaled('drop', 'Worst drop', 'mV', MILLI, 2, ({ worstDropV }) => worstDropV),
	scaled('netDrop', 'Net side', 'mV', MILLI, 2, ({ netDropV }) => netDropV),
	scaled('groundRise', 'Ground side', 'mV', MILLI, 2, ({ groundRiseV }) => groundRiseV),
	scaled('limit', 'Limit', 'mV', MILLI, 1, ({ limitV }) => limitV),
	scaled('margin', 'Margin', 'mV', MILLI, 2, ({ marginV }) => marginV),
	scaled('mean', 'Mean supply', 'mV', MILLI, 1, ({ meanV }) => meanV),
	scaled('min', 'Least supply', 'mV', MILLI, 1, ({ minV }) => minV)
];

export const feedColumns: readonly DataColumn<FeedRow>[] = [
	{ id: 'id', header: 'Bump', value: titled },
	{ id: 'net', header: 'Net', value: ({ net }) => net },
	scaled('x', 'x', 'µm', 1, 3, ({ xUm }) => xUm),
	scaled('y', 'y', 'µm', 1, 3, ({ yUm }) => yUm),
	scaled('amps', 'Current', 'mA', MILLI, 2, ({ amps }) => amps),
	scaled('load', 'Load', '%', PERCENT, 1, ({ loadFraction }) => loadFraction)
];

/** The column in which a finding about a row shows. */
const COLUMN_OF: Partial<Record<FindingKind, string>> = {
	drop: 'drop',
	collapsed: 'min',
	'regulator-load': 'load',
	'below-min-current': 'amps',
	headroom: 'headroom',
	'feed-load': 'load',
	placement: 'id'
};

/** Cells of a list's rows that break a limit, as "id column". */
export function brokenCells(
	result: ResultFile | null,
	list: 'regulators' | 'blocks' | 'feeds'
): ReadonlySet<string> {
	return new Set(
		(result?.findings ?? []).flatMap((finding) => {
			const column = COLUMN_OF[finding.kind];
			return finding.list === list && column ? [cellKey(finding.subject, column)] : [];
		})
	);
}

export function cellKey(id: string, column: string): string {
	return `${id} ${column}`;
}
