import { readFileSync } from 'node:fs';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
	formatProblems,
	hashFloorplan,
	parseFloorplan,
	parseFloorplanText,
	writeFloorplan
} from './index.ts';
import { findJsonFault } from './json-text.ts';

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
		['a missing list', ['straps'], undefined, 'straps: missing (expected a list)'],
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

	it('prints as many problems as asked for', () => {
		const problems = [1, 2, 3].map((k) => ({ path: `p${k}`, message: 'wrong' }));
		expect(formatProblems(problems, 2)).toEqual(['p1: wrong', 'p2: wrong', 'and 1 more']);
	});

	it.each([
		['the document', '"format"', '"__proto__": { "polluted": true }, "format"', '__proto__'],
		['a record', '"run": 0.04', '"run": 0.04, "__proto__": 1', 'blocks[0] (cpu).amps.__proto__'],
		[
			'an item',
			'"id": "R1"',
			'"id": "R1", "__proto__": { "fixed": true }',
			'regulators[0] (R1).__proto__'
		]
	])('a key named __proto__ in %s is an unknown field like any other', (_name, from, to, path) => {
		const result = parseFloorplanText(example.replace(from, to));
		expect(result).toMatchObject({ status: 'refused', problems: [{ path }] });
		expect(Reflect.get({}, 'polluted')).toBeUndefined();
	});

	it('a reserved name is no id, as an item or as a key', () => {
		expect(problemsOf(withValue(['modes', 0, 'id'], 'constructor'))[0]).toMatch(
			/^modes\[0\] \(constructor\)\.id: .*reserved/
		);
		expect(problemsOf(withValue(['blocks', 0, 'amps'], { toString: 1 }))[0]).toMatch(
			/^blocks\[0\] \(cpu\)\.amps\.toString: .*reserved/
		);
	});

	it('a list beyond its limit is refused as a whole', () => {
		const corners = Array.from({ length: 100_000 }, () => 0);
		expect(problemsOf(withValue(['corners'], corners))).toEqual([
			'corners: 100000 items (expected 1 to 256)'
		]);
		expect(problemsOf(withValue(['corners'], []))).toHaveLength(1);
	});

	it('a huge list of wrong items gives the first problems, not millions', () => {
		const feeds = Array.from({ length: 100_000 }, () => ({ id: 'f' }));
		const result = parseFloorplan(withValue(['feeds'], feeds));
		if (result.status !== 'refused') throw new Error('accepted');
		expect(result.problems.length).toBeLessThan(1100);
		expect(result.problems[0].path).toBe('feeds[0] (f).net');
	});

	it('shows long or deep values in short', () => {
		let deep: unknown = 0;
		for (let k = 0; k < 100_000; k++) deep = [deep];
		expect(problemsOf(withValue(['name'], deep))).toEqual(['name: list of 1 (expected a text)']);
		const [line] = problemsOf(withValue(['nets', 0, 'kind'], 'x'.repeat(1_000_000)));
		expect(line.length).toBeLessThan(200);
	});
});

describe('parseFloorplanText', () => {
	it.each<[string, string, string]>([
		['nothing', ' \n', 'file is empty'],
		['a missing value', '{\n  "format": ,\n}', 'line 2, column 13: "," where a value should stand'],
		['a missing end', '{ "name": "x"', 'line 1, column 14: the file ends where "," or "}"'],
		['an open text', '{ "name": "x', 'line 1, column 13: the file ends inside a text'],
		['NUL in a text', '{ "name": "a\u0000b" }', 'line 1, column 13: control character 0000'],
		['a line break in a text', '{ "name": "a\r\nb" }', 'line 1, column 13: control character 000D'],
		['NaN', '{ "version": NaN }', 'line 1, column 14: "N" where a value'],
		['a comment', '{\r\n // x\r\n}', 'line 2, column 2: "/" where a key'],
		['a comma too many', '[1,\n2,\n]', 'line 3, column 1: "]" where a value'],
		['an unknown escape', '"\\x41"', 'line 1, column 2: an escape that JSON does not know'],
		['a second document', '{} {}', 'line 1, column 4: "{" after the end of the document'],
		['a leading zero', '[01]', 'line 1, column 3: "1" where "," or "]"'],
		['a key twice', '{ "a": 1,\n "a": 2 }', 'line 2, column 2: key "a" stands twice'],
		['a key twice, once escaped', '{ "a": 1, "\\u0061": 2 }', 'line 1, column 11: key "a"'],
		['deep nesting', '['.repeat(1_000_000), 'line 1, column 17: nested deeper than 16'],
		['one long line', `${'['.padEnd(1_000_000)}x`, 'line 1, column 1000001: "x" where a value']
	])('%s: line and column', (_name, text, expected) => {
		const result = parseFloorplanText(text);
		expect(result).toMatchObject({
			status: 'refused',
			problems: [{ path: '', message: expect.stringContaining(expected) as string }]
		});
	});

	it('passes over a byte order mark and reads any line ends', () => {
		expect(parseFloorplanText(`\uFEFF${example}`).status).toBe('parsed');
		expect(parseFloorplanText(example.replaceAll('\n', '\r\n')).status).toBe('parsed');
	});

	it('finds a fault where, and only where, the engine finds one', () => {
		const pieces = fc.constantFrom(
			...[
				'{',
				'}',
				'[',
				']',
				',',
				':',
				'"a"',
				'"b"',
				'1',
				'-',
				'0',
				'.5',
				'e3',
				'true',
				'null',
				' '
			]
		);
		fc.assert(
			fc.property(
				fc.oneof(
					fc.json({ maxDepth: 6 }),
					fc.array(pieces).map((all) => all.join(''))
				),
				(text) => {
					let isJson = true;
					try {
						JSON.parse(text);
					} catch {
						isJson = false;
					}
					const fault = findJsonFault(text);
					// A key that stands twice is the one thing that the engine lets pass.
					if (fault?.message.includes('twice')) return;
					expect(fault === null).toBe(isJson);
				}
			),
			{ numRuns: 500 }
		);
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
