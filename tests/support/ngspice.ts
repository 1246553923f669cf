/** Runs decks in ngspice, a general circuit simulator from Debian's packages. */
import { execFile } from 'node:child_process';
import { mkdtemp, readFile, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { promisify } from 'node:util';

const run = promisify(execFile);

export interface OperatingPointOfDeck {
	/** Voltage of every node by its name in lower case. */
	readonly volts: ReadonlyMap<string, number>;
	/** Current of every voltage source by its name in lower case, A, from its first to its second node. */
	readonly amps: ReadonlyMap<string, number>;
}

const BINARY_MARK = 'Binary:\n';
const DOUBLE_BYTES = 8;

/**
 * Reads a raw file of one operating point: a text header that lists the variables, one a line as
 * index, name, kind, then one little-endian double for each.
 */
export function parseRawFile(file: Buffer): OperatingPointOfDeck {
	const mark = file.indexOf(BINARY_MARK);
	if (mark < 0) throw new Error('the raw file holds no binary values');
	const header = file.subarray(0, mark).toString('latin1');
	if (!/^Flags: real$/m.test(header) || !/^No\. Points: 1\s*$/m.test(header)) {
		throw new Error(`expected one point of real values, got:\n${header.slice(0, 400)}`);
	}
	const variables = [...header.matchAll(/^\t\d+\t(\S+)\t(\S+)/gm)];
	const volts = new Map<string, number>();
	const amps = new Map<string, number>();
	const start = mark + BINARY_MARK.length;
	for (const [index, [, name, kind]] of variables.entries()) {
		const value = file.readDoubleLE(start + index * DOUBLE_BYTES);
		const bare = name.toLowerCase().replace(/^[vi]\((.*)\)$/, '$1');
		if (kind === 'voltage') volts.set(bare, value);
		else if (kind === 'current') amps.set(bare.replace(/#branch$/, ''), value);
	}
	return { volts, amps };
}

/** Runs a deck unchanged in batch mode and gives its operating point at full double precision. */
export async function runDeck(deck: string): Promise<OperatingPointOfDeck> {
	const folder = await mkdtemp(path.join(tmpdir(), 'manyweir-deck-'));
	try {
		const deckPath = path.join(folder, 'deck.cir');
		const rawPath = path.join(folder, 'out.raw');
		await writeFile(deckPath, deck);
		const { stdout, stderr } = await run('ngspice', ['-b', '-r', rawPath, deckPath], {
			maxBuffer: 64 * 1024 * 1024
		});
		const raw = await readFile(rawPath).catch(() => {
			throw new Error(`ngspice found no operating point:\n${stdout}\n${stderr}`);
		});
		return parseRawFile(raw);
	} finally {
		await rm(folder, { recursive: true, force: true });
	}
}
