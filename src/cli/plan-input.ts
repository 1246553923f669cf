/** What `solve` and `netlist` share: reading the plan, picking mode and corner, reporting errors. */
import { readFile } from 'node:fs/promises';
import { parseFloorplanText } from '#lib/floorplan/index.ts';
import type { Corner, Floorplan, Mode } from '#lib/floorplan/index.ts';

/** Exit codes of the command line (model section 9). */
export const EXIT_SOLVED = 0;
export const EXIT_LIMIT_BROKEN = 1;
export const EXIT_REFUSED = 2;
export const EXIT_PROGRAM_ERROR = 3;

/** Lines printed of a longer list of problems. */
const MAX_ERROR_LINES = 20;

/** Failures come as lines of the form `path: what is wrong (what is expected)`. */
interface Refused {
	readonly status: 'refused';
	readonly lines: readonly string[];
}

export type PlanRead = { readonly status: 'read'; readonly floorplan: Floorplan } | Refused;

export type ConditionsPicked =
	{ readonly status: 'picked'; readonly mode: Mode; readonly corner: Corner } | Refused;

/** One line per problem, `path: message`; what concerns the whole document bears the file's name. */
export function problemLines(
	problems: readonly { readonly path: string; readonly message: string }[],
	file = 'document'
): string[] {
	return problems.map(({ path, message }) => `${path || file}: ${message}`);
}

function reasonOf(error: unknown): string {
	return error instanceof Error ? error.message : String(error);
}

function fileProblem(error: unknown): string {
	const code = error instanceof Error && 'code' in error ? error.code : undefined;
	if (code === 'ENOENT') return 'there is no such file (expected a floorplan file)';
	if (code === 'EISDIR') return 'is a folder (expected a floorplan file)';
	if (code === 'EACCES') return 'may not be read (expected a readable floorplan file)';
	return `cannot be read: ${reasonOf(error)} (expected a floorplan file)`;
}

/** The line for a file that an option names and that cannot be written. */
export function writeProblem(option: string, path: string, error: unknown): string {
	return `${option}: ${path} cannot be written: ${reasonOf(error)} (expected a writable file)`;
}

/** Reads and parses a floorplan file. */
export async function readPlan(path: string): Promise<PlanRead> {
	let text: string;
	try {
		text = await readFile(path, 'utf8');
	} catch (error) {
		return { status: 'refused', lines: [`${path}: ${fileProblem(error)}`] };
	}
	const parsed = parseFloorplanText(text);
	return parsed.status === 'parsed'
		? { status: 'read', floorplan: parsed.floorplan }
		: { status: 'refused', lines: problemLines(parsed.problems, path) };
}

function pick<T extends { readonly id: string }>(
	option: string,
	list: readonly T[],
	id: string | undefined
): T | string {
	if (id === undefined) return list[0];
	const known = list.map((item) => item.id).join(', ');
	return (
		list.find((item) => item.id === id) ??
		`${option}: there is no "${id}" in the plan (expected one of ${known})`
	);
}

/** The mode and corner with the given ids; the first of each where none is given. */
export function pickModeAndCorner(
	floorplan: Floorplan,
	ids: { readonly mode?: string; readonly corner?: string }
): ConditionsPicked {
	const mode = pick('--mode', floorplan.modes, ids.mode);
	const corner = pick('--corner', floorplan.corners, ids.corner);
	if (typeof mode !== 'string' && typeof corner !== 'string') {
		return { status: 'picked', mode, corner };
	}
	return {
		status: 'refused',
		lines: [mode, corner].filter((line) => typeof line === 'string')
	};
}

/** Prints the problems on standard error, at most 20 and a count, and gives the exit code. */
export function failWith(lines: readonly string[]): typeof EXIT_REFUSED {
	const shown = lines.slice(0, MAX_ERROR_LINES);
	if (lines.length > shown.length) {
		shown.push(`and ${lines.length - shown.length} more problems (${lines.length} in all)`);
	}
	process.stderr.write(`${shown.join('\n')}\n`);
	return EXIT_REFUSED;
}

/** Runs a command and leaves its exit code; anything thrown is an error of the program itself. */
export async function runCommand(command: () => Promise<number>): Promise<void> {
	try {
		process.exitCode = await command();
	} catch (error) {
		const reason = error instanceof Error ? (error.stack ?? error.message) : String(error);
		process.stderr.write(`This is an error of the program, not of the plan: ${reason}\n`);
		process.exitCode = EXIT_PROGRAM_ERROR;
	}
}
