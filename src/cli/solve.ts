/** Solves one mode and corner of a plan and writes the result as JSON. */
import { writeFile } from 'node:fs/promises';
import { performance } from 'node:perf_hooks';
import { parseArgs } from 'node:util';
import { hashFloorplan } from '#lib/floorplan/index.ts';
import { meshFloorplan } from '#lib/mesh/index.ts';
import { buildResult, nodesCsv } from '#lib/results/index.ts';
import { createGridCache, solveOperatingPoint } from '#lib/solver/index.ts';
import { threadFor } from '#lib/threads/index.ts';
import {
	EXIT_LIMIT_BROKEN,
	EXIT_SOLVED,
	failWith,
	pickModeAndCorner,
	problemLines,
	readPlan,
	runCommand,
	writeProblem
} from './plan-input.ts';

const USAGE =
	'solve -- plan.json [--mode ID] [--corner ID] [--out result.json] [--nodes nodes.csv] [--strict]';

function readArguments(args: readonly string[]) {
	try {
		return parseArgs({
			args: [...args],
			allowPositionals: true,
			options: {
				mode: { type: 'string' },
				corner: { type: 'string' },
				out: { type: 'string' },
				nodes: { type: 'string' },
				strict: { type: 'boolean', default: false }
			}
		});
	} catch (error) {
		return error instanceof Error ? error.message : String(error);
	}
}

function seconds(): number {
	return performance.now() / 1000;
}

/** Highest resident memory of this process so far, MB. */
function peakMb(): number {
	return process.resourceUsage().maxRSS / 1024;
}

/** Writes one of the files that options name; the error line where it cannot be written. */
async function writeNamed(option: string, path: string, text: string): Promise<string | null> {
	try {
		await writeFile(path, text);
		return null;
	} catch (error) {
		return writeProblem(option, path, error);
	}
}

async function solve(): Promise<number> {
	const parsed = readArguments(process.argv.slice(2));
	if (typeof parsed === 'string') return failWith([`arguments: ${parsed} (expected ${USAGE})`]);
	const { positionals, values } = parsed;
	if (positionals.length !== 1) {
		return failWith([`arguments: ${positionals.length} plans are named (expected ${USAGE})`]);
	}
	const read = await readPlan(positionals[0]);
	if (read.status === 'refused') return failWith(read.lines);
	const { floorplan } = read;
	const conditions = pickModeAndCorner(floorplan, values);
	if (conditions.status === 'refused') return failWith(conditions.lines);

	const begin = seconds();
	const meshed = meshFloorplan(floorplan);
	if (meshed.status === 'refused') return failWith(problemLines(meshed.problems));
	const meshSeconds = seconds() - begin;
	const { network } = meshed;
	const thread = threadFor(Math.max(...network.nets.map(({ nodeCount }) => nodeCount)));
	const outcome = solveOperatingPoint(floorplan, network, {
		mode: conditions.mode.id,
		corner: conditions.corner.id,
		cache: createGridCache(network, thread),
		now: seconds
	});
	await thread?.stop();
	if (outcome.status === 'stopped') throw new Error('the solve stopped without being asked to');
	if (outcome.status !== 'solved') return failWith(problemLines(outcome.problems));

	const result = buildResult(floorplan, network, outcome.point, {
		sha256: hashFloorplan(floorplan),
		meshSeconds,
		totalSeconds: seconds() - begin,
		peakMb: peakMb()
	});
	const failures: string[] = [];
	if (values.nodes !== undefined) {
		const failed = await writeNamed(
			'--nodes',
			values.nodes,
			nodesCsv(floorplan, network, outcome.point)
		);
		if (failed !== null) failures.push(failed);
	}
	if (failures.length === 0 && values.out !== undefined) {
		const failed = await writeNamed('--out', values.out, `${JSON.stringify(result, null, '\t')}\n`);
		if (failed !== null) failures.push(failed);
	}
	if (failures.length > 0) return failWith(failures);
	if (values.out === undefined) process.stdout.write(`${JSON.stringify(result)}\n`);
	return values.strict && result.findings.length > 0 ? EXIT_LIMIT_BROKEN : EXIT_SOLVED;
}

await runCommand(solve);
