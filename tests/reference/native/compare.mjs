/**
 * `npm run bench:native`: times general native libraries (Debian's packages) and our own engine on
 * the same systems in the same run, alternating, each time in a fresh process, and prints a table of
 * medians. Builds the programs beside it in a temporary folder, which it removes at the end.
 */
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { parseArgs } from 'node:util';
import { requireDebian } from '../../../src/cli/install.mjs';
import { Refusal, runScript } from '../../../src/cli/paths.mjs';
import { describeMachine } from './machine.mjs';
import { buildProgram, METHODS, timeMethod, timeOurs } from './methods.mjs';
import { OURS, printTable } from './table.mjs';

const CASES = ['uniform', 'irregular', 'strong'];
const SIZES = [62_000, 250_000, 1_000_000, 2_000_000];
const PACKAGES = /** @type {const} */ ([
	'g++',
	'libsuitesparse-dev',
	'libhypre-dev',
	'libeigen3-dev',
	'libopenblas0-pthread'
]);
const USAGE =
	'bench:native -- [--sizes 62000,250000] [--cases uniform,irregular,strong] [--repeats 3] [--json]';

/** @param {string} option @param {string} text */
function wholeNumber(option, text) {
	const value = Number(text);
	if (Number.isInteger(value) && value >= 1) return value;
	throw new Refusal(`--${option}: ${text} (expected a whole number of 1 or more)`);
}

function readArguments() {
	/** @type {{ sizes: string, cases: string, repeats: string, json: boolean }} */
	let values;
	try {
		values = parseArgs({
			options: {
				sizes: { type: 'string', default: SIZES.join(',') },
				cases: { type: 'string', default: CASES.join(',') },
				repeats: { type: 'string', default: '3' },
				json: { type: 'boolean', default: false }
			}
		}).values;
	} catch (error) {
		const reason = error instanceof Error ? error.message : String(error);
		throw new Refusal(`arguments: ${reason} (expected ${USAGE})`);
	}
	const cases = values.cases.split(',');
	for (const one of cases) {
		if (!CASES.includes(one)) throw new Refusal(`--cases: ${one} (expected ${CASES.join(', ')})`);
	}
	return {
		cases,
		sizes: values.sizes.split(',').map((text) => wholeNumber('sizes', text)),
		repeats: wholeNumber('repeats', values.repeats),
		json: values.json
	};
}

/**
 * All runs on one system: ours and theirs in turn, as often as wanted.
 * @param {string} folder
 * @param {number} size
 * @param {string} kind
 * @param {number} repeats
 */
async function compareOn(folder, size, kind, repeats) {
	const files = ['A.mtx', 'b.mtx', 'xy.mtx'].map((name) => join(folder, name));
	/** @type {Record<string, import('./methods.mjs').Timing[]>} */
	const timings = {};
	for (let round = 0; round < repeats; round++) {
		// The first round leaves the system for the others.
		const ours = await timeOurs(size, kind, round === 0 ? files : []);
		(timings[OURS] ??= []).push(ours);
		for (const method of METHODS) {
			const theirs = await timeMethod(folder, method, files);
			if (theirs.nodes !== ours.nodes) {
				throw new Error(`${method.name} read ${theirs.nodes} nodes instead of ${ours.nodes}`);
			}
			(timings[method.name] ??= []).push(theirs);
		}
	}
	return { kind, nodes: timings[OURS][0].nodes, timings };
}

await runScript(async () => {
	const { sizes, cases, repeats, json } = readArguments();
	await requireDebian(PACKAGES);
	const folder = mkdtempSync(join(tmpdir(), 'bench-native-'));
	try {
		await buildProgram(folder);
		const machine = await describeMachine();
		const systems = [];
		for (const size of sizes) {
			for (const kind of cases) {
				console.error(`${size} nodes, ${kind} …`);
				systems.push(await compareOn(folder, size, kind, repeats));
			}
		}
		if (json) console.log(JSON.stringify({ machine, repeats, systems }));
		else printTable(machine, repeats, systems);
	} finally {
		rmSync(folder, { recursive: true, force: true });
	}
});
