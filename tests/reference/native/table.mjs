import { METHODS } from './methods.mjs';

/** @typedef {import('./methods.mjs').Timing} Timing */
/** @typedef {{ kind: string, nodes: number, timings: Record<string, Timing[]> }} Compared */

export const OURS = 'Manyweir';
/** Largest relative residual of an answer that counts; what theirs are asked for. */
const MOST_RESIDUAL = 1e-10;

/** @param {readonly number[]} values */
function median(values) {
	const sorted = [...values].sort((a, b) => a - b);
	const middle = sorted.length / 2;
	return sorted.length % 2 === 1
		? sorted[Math.floor(middle)]
		: (sorted[middle - 1] + sorted[middle]) / 2;
}

/**
 * Median and least milliseconds, or infinity where an answer was not exact enough.
 * @param {readonly Timing[]} timings
 */
function spreadOf(timings) {
	if (!timings.every(({ residual }) => residual <= MOST_RESIDUAL)) {
		return { middle: Infinity, least: Infinity };
	}
	const all = timings.map(({ ms }) => ms);
	return { middle: median(all), least: Math.min(...all) };
}

/** @param {{ middle: number, least: number }} spread */
function asCell({ middle, least }) {
	return Number.isFinite(middle) ? `${middle.toFixed(0)} (${least.toFixed(0)})` : 'inexact';
}

/**
 * Row of a system: nodes, case, ours, each of theirs, ours divided by the fastest of theirs.
 * @param {Compared} compared
 */
function rowOf({ kind, nodes, timings }) {
	const ours = spreadOf(timings[OURS]);
	const theirs = METHODS.map(({ name }) => spreadOf(timings[name]));
	const ratio = (/** @type {'middle' | 'least'} */ which) =>
		(ours[which] / Math.min(...theirs.map((spread) => spread[which]))).toFixed(2);
	const cells = [ours, ...theirs].map(asCell);
	return [String(nodes), kind, ...cells, `${ratio('middle')} (${ratio('least')})`];
}

/**
 * Prints the machine, what is counted, and the table in Markdown.
 * @param {readonly string[]} machine
 * @param {number} repeats
 * @param {readonly Compared[]} systems
 */
export function printTable(machine, repeats, systems) {
	const header = ['nodes', 'case', OURS, ...METHODS.map(({ name }) => name), 'ours / fastest'];
	const rows = systems.map(rowOf);
	const widths = header.map((cell, k) =>
		Math.max(cell.length, ...rows.map((row) => row[k].length))
	);
	const asLine = (/** @type {readonly string[]} */ cells) =>
		`| ${cells.map((cell, k) => cell.padEnd(widths[k])).join(' | ')} |`;
	console.log(`${machine.join('\n')}

Median ms of ${repeats} (and the least), each in a fresh process, in turn. Counted: from the matrix
in memory, in each one's own form, to an answer of a true relative residual of 1e-10 (ordering,
analysis, factor or multigrid set-up, solution). Not counted: reading, building and dealing out the
matrix, starting the process, checking the residual. Two threads each (CHOLMOD: of its BLAS; hypre:
two processes) unless said otherwise; the given order is a nested dissection by coordinates, counted.
`);
	console.log(asLine(header));
	console.log(asLine(widths.map((width) => '-'.repeat(width))));
	for (const row of rows) console.log(asLine(row));
}
