/** Writes the network of a plan, in one mode and corner, as a SPICE-syntax deck. */
import { writeFile } from 'node:fs/promises';
import { parseArgs } from 'node:util';
import { meshFloorplan } from '#lib/mesh/index.ts';
import { writeDeck } from '#lib/netlist/index.ts';
import { solveOperatingPoint } from '#lib/solver/index.ts';
import {
	EXIT_SOLVED,
	failWith,
	pickModeAndCorner,
	problemLines,
	readPlan,
	runCommand,
	writeProblem
} from './plan-input.ts';

const USAGE = 'netlist -- plan.json [--mode ID] [--corner ID] [--out deck.cir]';

function readArguments(args: readonly string[]) {
	try {
		return parseArgs({
			args: [...args],
			allowPositionals: true,
			options: {
				mode: { type: 'string' },
				corner: { type: 'string' },
				out: { type: 'string' }
			}
		});
	} catch (error) {
		return error instanceof Error ? error.message : String(error);
	}
}

async function netlist(): Promise<number> {
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
	const meshed = meshFloorplan(floorplan);
	if (meshed.status === 'refused') return failWith(problemLines(meshed.problems));
	const { mode, corner } = conditions;
	// A small deck starts a simulator at the answer, if there is one; it states the network either way.
	const outcome = solveOperatingPoint(floorplan, meshed.network, {
		mode: mode.id,
		corner: corner.id,
		now: () => 0
	});
	const start = outcome.status === 'solved' ? outcome.point : null;
	const written = writeDeck(floorplan, meshed.network, { mode, corner, start });
	if (written.status === 'refused') return failWith(problemLines(written.problems));
	if (values.out === undefined) {
		process.stdout.write(written.deck);
		return EXIT_SOLVED;
	}
	try {
		await writeFile(values.out, written.deck);
	} catch (error) {
		return failWith([writeProblem('--out', values.out, error)]);
	}
	return EXIT_SOLVED;
}

await runCommand(netlist);
