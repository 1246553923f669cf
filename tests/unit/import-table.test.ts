import { readdirSync, readFileSync, statSync } from 'node:fs';
import { dirname, join, normalize, relative } from 'node:path';
import { describe, expect, it } from 'vitest';
import { MAY_IMPORT, PURE, PURE_PACKAGES } from '../support/import-table.js';

type Folder = keyof typeof MAY_IMPORT;

interface Import {
	/** File that imports, from the root. */
	readonly file: string;
	/** File that is imported, from the root, or the name of a package. */
	readonly target: string;
	readonly isPackage: boolean;
}

function filesBelow(folder: string): string[] {
	return readdirSync(folder).flatMap((name) => {
		const path = join(folder, name);
		return statSync(path).isDirectory() ? filesBelow(path) : [path];
	});
}

/** Every import of a file, type imports and dynamic ones included. */
function importsOf(file: string): Import[] {
	const text = readFileSync(file, 'utf8');
	const found = text.matchAll(
		/(?:^|\s)(?:import|export)\s[^'"`;]*?from\s*['"]([^'"]+)['"]|(?:^|\s)import\s*['"]([^'"]+)['"]|import\(\s*['"]([^'"]+)['"]/g
	);
	return [...found].map((match) => {
		const name = match[1] ?? match[2] ?? match[3];
		if (name.startsWith('#lib/')) {
			return { file, target: join('src/lib', name.slice('#lib/'.length)), isPackage: false };
		}
		if (name.startsWith('.')) {
			return { file, target: normalize(join(dirname(file), name)), isPackage: false };
		}
		return { file, target: name, isPackage: true };
	});
}

const sources = filesBelow('src').filter((file) => /\.(ts|mjs|svelte)$/.test(file));
const imports = sources
	.filter((file) => !file.endsWith('.test.ts'))
	.flatMap((file) => importsOf(file));

function folderOf(path: string): Folder | null {
	const [folder] = relative('src/lib', path).split('/');
	return Object.hasOwn(MAY_IMPORT, folder) ? (folder as Folder) : null;
}

describe('imports', () => {
	it('every folder of src/lib stands in the table', () => {
		const folders = readdirSync('src/lib').filter((name) =>
			statSync(join('src/lib', name)).isDirectory()
		);
		expect(folders.filter((folder) => !Object.hasOwn(MAY_IMPORT, folder))).toEqual([]);
	});

	it('look down only', () => {
		const breaches = imports.filter(({ file, target, isPackage }) => {
			const from = folderOf(file);
			const to = isPackage ? null : folderOf(target);
			if (!from || !to || from === to) return false;
			return !(MAY_IMPORT[from] as readonly string[]).includes(to);
		});
		expect(breaches.map(({ file, target }) => `${file} -> ${target}`)).toEqual([]);
	});

	it('pure folders use nothing but the packages named for them', () => {
		const breaches = imports.filter(({ file, target, isPackage }) => {
			const from = folderOf(file);
			if (!from || !PURE.includes(from) || !isPackage) return false;
			return !PURE_PACKAGES.some((name) => target === name || target.startsWith(`${name}/`));
		});
		expect(breaches.map(({ file, target }) => `${file} -> ${target}`)).toEqual([]);
	});

	it('pages, components and the command line keep to their side', () => {
		const breaches = imports.filter(({ file, target, isPackage }) => {
			if (isPackage) return false;
			const isServerCode = target.startsWith('src/lib/server/');
			if (file.startsWith('src/routes/')) {
				return isServerCode && !/\+(server|(page|layout)\.server)\.ts$/.test(file);
			}
			return target.startsWith('src/routes/') && !file.startsWith('src/routes/');
		});
		expect(breaches.map(({ file, target }) => `${file} -> ${target}`)).toEqual([]);
	});

	it('no source imports tests', () => {
		const breaches = imports.filter(({ target }) => target.startsWith('tests/'));
		expect(breaches.map(({ file }) => file)).toEqual([]);
	});

	it('go in no circle', () => {
		const next = new Map<string, string[]>();
		for (const { file, target, isPackage } of imports) {
			if (!isPackage) next.set(file, [...(next.get(file) ?? []), target]);
		}
		const state = new Map<string, 'open' | 'done'>();
		const circles: string[] = [];
		const visit = (file: string, path: readonly string[]) => {
			if (state.get(file) === 'done') return;
			if (state.get(file) === 'open') {
				circles.push([...path.slice(path.indexOf(file)), file].join(' -> '));
				return;
			}
			state.set(file, 'open');
			for (const target of next.get(file) ?? []) visit(target, [...path, file]);
			state.set(file, 'done');
		};
		for (const file of sources) visit(file, []);
		expect(circles).toEqual([]);
	});
});
