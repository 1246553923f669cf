import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import {
	formatProblems,
	hashFloorplan,
	parseFloorplan,
	parseFloorplanText,
	writeFloorplan
} from './index.ts';

const example = readFileSync('tests/fixtures/floorplan-version-1.json', 'utf8');

/** The stored example with one value replaced, by path. */
function withValue(path: (string | number)[], value: unknown): unknown {
	const document: unknown = JSON.parse(example);
	let target = document as Record<PropertyKey, unknown>;
	for (const key of path.slice(0, -1)) target = target[key] as Record<PropertyKey, unknown>;
	target[path[path.length - 1]] = value;
	return document;
}

function problemsOf(data: unknown): string[] {
	const result = parseFloorplan(data);
	return result.status === 'refused' ? formatProblems(result.problems) : [];
}

describe('parseFloorplan', () => {
	it('reads the stored example of version 1 and fills in the defaults', () => {
		const result = parseFloorplanText(example);
		if (result.status !== 'parsed') throw new Error(formatProblems(result.problems).join('\n'));
		expect(result.floorplan.regulators[0]).toMatchObject({
			orient: 'R0',
			enabled: true,
			offsetV: 0
		});
		expect(result.floorplan.corners[0].id).toBe('nominal');
		expect(result.floorplan.keepouts).toEqual([]);
	});

	it.each<[string, (string | number)[], unknown, string]>([
		['an unknown field', ['regulators', 0, 'speed'], 3, 'regulators[0] (R1).speed: unknown field'],
		[
			'a negative resistance',
			['layers', 0, 'sheetOhm'],
			-1,
			'layers[0] (M1).sheetOhm: -1 is too small'
		],
		[
			'a text for a number',
			['feeds', 0, 'xUm'],
			'1',
			'feeds[0] (bump).xUm: "1" (expected a finite number)'
		],
		['NaN', ['feeds', 0, 'seriesOhm'], NaN, 'feeds[0] (bump).seriesOhm: NaN'],
		['infinity', ['feeds', 0, 'seriesOhm'], Infinity, 'feeds[0] (bump).seriesOhm: Infinity'],
		[
			'a length off the nanometre grid',
			['straps', 0, 'pitchUm'],
			1.00005,
			'straps[0] (core.M1).pitchUm'
		],
		['a missing list', ['straps'], undefined, 'straps: missing (expected array)'],
		['a wrong format', ['format'], 'other', 'format: "other" (expected "manyweir-floorplan")'],
		[
			'a dangling cell',
			['regulators', 0, 'cell'],
			'none',
			'regulators[0] (R1).cell: cell "none" does not exist (expected one of "weir")'
		],
		[
			'a regulator onto an input net',
			['regulators', 0, 'output'],
			'vin',
			'regulators[0] (R1).output: net "vin" is input'
		],
		[
			'a feed on a regulated net',
			['feeds', 0, 'net'],
			'core',
			'feeds[0] (bump).net: net "core" is regulated'
		],
		[
			'a dangling mode',
			['blocks', 0, 'amps'],
			{ turbo: 1 },
			'blocks[0] (cpu).amps.turbo: mode "turbo" does not exist'
		],
		['an id twice', ['nets', 1, 'id'], 'vin', 'nets[1] (vin).id: id is used by nets[0] too'],
		['a bad id', ['nets', 1, 'id'], 'a b', 'nets[1] (a b).id'],
		[
			'a crossing outline',
			['die', 'outline'],
			[
				[0, 0],
				[10, 10],
				[10, 0],
				[0, 10]
			],
			'die.outline: outline crosses or touches itself'
		],
		['a via upside down', ['vias', 0, 'lower'], 'M2', 'vias[0] (V1).upper: "M2" is not above "M2"'],
		[
			'an override of no block',
			['limits'],
			{ overrides: { blocks: { gpu: { dropV: 1 } } } },
			'limits.overrides.blocks.gpu: block "gpu" does not exist'
		],
		[
			'weights of the wrong count',
			['blocks', 0, 'spread'],
			{ kind: 'map', columns: 2, rows: 2, weights: [1] },
			'blocks[0] (cpu).spread'
		]
	])('refuses %s with its path', (_name, path, value, expected) => {
		const lines = problemsOf(withValue(path, value));
		expect(lines.some((line) => line.startsWith(expected))).toBe(true);
	});

	it('lists every problem, prints 20 and counts the rest', () => {
		const straps = Array.from({ length: 25 }, (_, i) => ({
			id: `s${i}`,
			net: 'nowhere',
			layer: 'M1',
			pitchUm: 1,
			widthUm: 1,
			offsetUm: 0
		}));
		const lines = problemsOf(withValue(['straps'], straps));
		expect(lines).toHaveLength(21);
		expect(lines[20]).toBe('and 5 more');
	});

	it('a key named __proto__ is an unknown field like any other', () => {
		const text = example.replace('"format"', '"__proto__": { "polluted": true }, "format"');
		const result = parseFloorplanText(text);
		expect(result.status).toBe('refused');
		expect(Reflect.get({}, 'polluted')).toBeUndefined();
	});

	it('names line and column of a syntax error and passes over a byte order mark', () => {
		const broken = parseFloorplanText('{\n  "format": ,\n}');
		expect(broken).toMatchObject({
			status: 'refused',
			problems: [{ message: expect.stringMatching(/expected a JSON document/) as string }]
		});
		expect(parseFloorplanText(`\uFEFF${example}`).status).toBe('parsed');
	});
});

describe('hashFloorplan', () => {
	function parsed(data: unknown) {
		const result = parseFloorplan(data);
		if (result.status !== 'parsed') throw new Error(formatProblems(result.problems).join('\n'));
		return result.floorplan;
	}

	it('is the same for keys in another order, with defaults written out, and after a file', () => {
		const first = parsed(JSON.parse(example));
		const reversed = Object.fromEntries(Object.entries(first).reverse());
		expect(hashFloorplan(parsed(reversed))).toBe(hashFloorplan(first));
		expect(hashFloorplan(parsed(JSON.parse(writeFloorplan(first))))).toBe(hashFloorplan(first));
	});

	it('changes with any value', () => {
		const first = hashFloorplan(parsed(JSON.parse(example)));
		expect(hashFloorplan(parsed(withValue(['feeds', 0, 'xUm'], 10.001)))).not.toBe(first);
		expect(first).toMatch(/^[0-9a-f]{64}$/);
	});
});
