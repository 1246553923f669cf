/**
 * Compiles the numeric kernels (src/lib/sparse/assembly, AssemblyScript) to WebAssembly and writes
 * them into a TypeScript file, once for a memory of one thread and once for a shared one. The file is
 * kept in the repository, so that command line, worker and page need no step before them; a test
 * compares it with what the sources give.
 */
import asc from 'assemblyscript/asc';
import { writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { ROOT } from './paths.mjs';

export const KERNELS_FILE = join(ROOT, 'src/lib/sparse/kernels-module.ts');

/** Most pages of a memory: what 32-bit pointers reach. */
const MOST_PAGES = '65536';

/** @param {string[]} options */
async function compile(options) {
	/** @type {Uint8Array | undefined} */
	let binary;
	const { error, stderr } = await asc.main(
		[
			'index.ts',
			'--baseDir',
			join(ROOT, 'src/lib/sparse/assembly'),
			'--outFile',
			'kernels.wasm',
			'-O3',
			'--converge',
			'--noAssert',
			'--runtime',
			'stub',
			'--importMemory',
			'--enable',
			'simd',
			...options
		],
		{
			writeFile(name, contents) {
				if (name === 'kernels.wasm' && typeof contents !== 'string') binary = contents;
			}
		}
	);
	if (error || !binary) throw new Error(`The kernels do not compile.\n${stderr.toString()}`);
	return Buffer.from(binary).toString('base64');
}

/** The text of the generated file. */
export async function kernelsFile() {
	const own = await compile([]);
	const shared = await compile([
		'--enable',
		'threads',
		'--sharedMemory',
		'--maximumMemory',
		MOST_PAGES
	]);
	return [
		'/** Made from assembly/ by `npm run build:kernels`: WebAssembly modules in base64. */',
		`export const KERNELS =\n\t'${own}';`,
		`export const SHARED_KERNELS =\n\t'${shared}';`,
		''
	].join('\n');
}

if (process.argv[1] === import.meta.filename) await writeFile(KERNELS_FILE, await kernelsFile());
