/**
 * Who may import whom. One table for the lint rules (eslint.config.js, while typing) and for the test
 * that walks every import (tests/unit/import-table.test.ts). Plain JavaScript, since eslint reads its
 * configuration before anything is compiled.
 */

/** Folders of src/lib that each folder may import besides itself; type imports count. */
export const MAY_IMPORT = {
	units: [],
	geometry: [],
	sparse: [],
	threads: ['sparse'],
	floorplan: ['units', 'geometry'],
	library: ['floorplan'],
	mesh: ['floorplan', 'geometry', 'sparse'],
	solver: ['mesh', 'floorplan', 'sparse'],
	results: ['solver', 'mesh', 'floorplan', 'units', 'geometry'],
	netlist: ['mesh', 'floorplan', 'units'],
	demo: ['floorplan', 'geometry', 'units', 'library'],
	contracts: ['floorplan', 'results', 'units'],
	editor: ['floorplan', 'geometry', 'units', 'results'],
	components: ['editor', 'contracts', 'results', 'floorplan', 'geometry', 'units'],
	server: [
		'units',
		'geometry',
		'sparse',
		'threads',
		'floorplan',
		'library',
		'mesh',
		'solver',
		'results',
		'netlist',
		'demo',
		'contracts'
	]
};

/** Why the table forbids what it forbids; shown with each breach. */
export const REASON =
	'Layers look down only (tests/support/import-table.js): move the shared part to the lower folder, or hand the value in.';

/** Folders that give the same answer in server, worker, browser and test. */
export const PURE = [
	'units',
	'geometry',
	'sparse',
	'floorplan',
	'library',
	'mesh',
	'solver',
	'results',
	'netlist',
	'demo',
	'contracts'
];

/** Packages that pure folders may use. */
export const PURE_PACKAGES = ['zod', 'rbush', 'ml-matrix', '@noble/hashes'];

/** Globals that pure folders may not name, and what to do instead. */
export const PURE_GLOBALS = [
	{ name: 'window', message: 'Pure code runs where there is no window: hand the value in.' },
	{ name: 'document', message: 'Pure code runs where there is no page: hand the value in.' },
	{ name: 'process', message: 'Pure code runs in the browser too: hand the value in.' },
	{ name: 'Date', message: 'Pure code has no clock: take a `now` function.' },
	{ name: 'console', message: 'Pure code says nothing by itself: return what is to be told.' }
];
