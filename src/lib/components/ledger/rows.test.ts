import { describe, expect, it } from 'vitest';
import { floorplanSchema } from '#lib/floorplan/index.ts';
import type { ResultFile } from '#lib/results/index.ts';
import { cellText } from '../ui/data-column.ts';
import {
	blockColumns,
	blockRows,
	brokenCells,
	cellKey,
	regulatorColumns,
	regulatorRows
} from './rows.ts';

const floorplan = floorplanSchema.parse({
	format: 'manyweir-floorplan',
	version: 1,
	die: {
		outline: [
			[0, 0],
			[10, 0],
			[10, 10],
			[0, 10]
		]
	},
	layers: [{ id: 'M1', direction: 'horizontal', sheetOhm: 0.1 }],
	nets: [{ id: 'vdd', kind: 'regulated', volts: 1 }],
	straps: [],
	cells: [
		{
			id: 'weir',
			widthUm: 1,
			heightUm: 1,
			outputOhm: 1,
			onOhm: 1,
			maxA: 0.01,
			minA: 0,
			quiescentA: 0,
			offsetSigmaV: 0
		}
	],
	regulators: [
		{ id: 'r1', cell: 'weir', input: null, output: 'vdd', xUm: 0, yUm: 0 },
		{ id: 'r2', cell: 'weir', input: null, output: 'vdd', xUm: 2, yUm: 0, enabled: false }
	],
	blocks: [
		{
			id: 'b1',
			name: 'Core',
			net: 'vdd',
			outline: [
				[0, 0],
				[5, 0],
				[5, 5]
			],
			amps: { default: 0.25 }
		}
	]
});

/** The parts of a result that the ledger reads. */
const result = {
	regulators: [
		{
			id: 'r1',
			amps: 0.0123456,
			loadFraction: 1.23456,
			state: 'limited',
			setV: 1,
			outV: 0.98,
			inV: null,
			gndV: 0,
			headroomV: null,
			lossW: 0.0015
		}
	],
	blocks: [],
	feeds: [],
	findings: [
		{
			kind: 'regulator-load',
			list: 'regulators',
			subject: 'r1',
			value: 1.23456,
			limit: 1,
			unit: '',
			message: ''
		},
		{ kind: 'strap-load', list: 'straps', subject: 'r1', value: 2, limit: 1, unit: '', message: '' }
	]
} as unknown as ResultFile;

function texts<Row>(rows: readonly Row[], columns: Parameters<typeof cellText<Row>>[1][]) {
	return rows.map((row) => columns.map((column) => cellText(row, column)));
}

describe('the ledger', () => {
	it('says of each regulator what the result says, in one unit by column', () => {
		expect(texts(regulatorRows(floorplan, result), [...regulatorColumns])).toEqual([
			['r1', 'vdd', 'weir', 'limited', '12.35', '123.5', '–', '1.50', '1000.0', '980.0', '–'],
			['r2', 'vdd', 'weir', 'off', '–', '–', '–', '–', '–', '–', '–']
		]);
	});

	it('shows what a block asks for before anything is solved', () => {
		const [row] = texts(blockRows(floorplan, null, 'default'), [...blockColumns]);
		expect(row.slice(0, 4)).toEqual(['b1, Core', 'vdd', '250.00', '–']);
	});

	it('marks the cell that a finding of the same list is about', () => {
		expect([...brokenCells(result, 'regulators')]).toEqual([cellKey('r1', 'load')]);
		expect(brokenCells(null, 'blocks').size).toBe(0);
	});
});
