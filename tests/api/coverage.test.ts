/** Every way into the server asks who is there: read from the source, so that a new one cannot forget. */
import ts from 'typescript';
import { describe, expect, it } from 'vitest';

/** Ways in that need nobody signed in, each with its reason. */
const OPEN: Readonly<Record<string, string>> = {
	'src/routes/healthz/+server.ts GET': 'tells only that the process lives',
	'src/routes/readyz/+server.ts GET': 'tells only that the database answers',
	'src/routes/sign-out/+server.ts POST': 'ends the session of whoever asks',
	'src/routes/(entry)/sign-in/+page.server.ts load': 'the way to sign in',
	'src/routes/(entry)/sign-in/+page.server.ts default': 'the way to sign in',
	'src/routes/(entry)/sign-up/+page.server.ts load': 'the way to found a team',
	'src/routes/(entry)/sign-up/+page.server.ts default': 'the way to found a team'
};

/** Texts of source files by path. */
function withoutSlash(texts: Record<string, string>): [file: string, text: string][] {
	return Object.entries(texts).map(([file, text]) => [file.slice(1), text]);
}
const routeFiles = withoutSlash(
	import.meta.glob<string>('/src/routes/**/+*server.ts', {
		query: '?raw',
		import: 'default',
		eager: true
	})
);
const serviceFiles = withoutSlash(
	import.meta.glob<string>('/src/lib/server/services/*.ts', {
		query: '?raw',
		import: 'default',
		eager: true
	})
).filter(([file]) => !file.endsWith('.test.ts'));

const METHODS = ['GET', 'HEAD', 'POST', 'PUT', 'PATCH', 'DELETE', 'OPTIONS', 'fallback'];

interface Door {
	readonly name: string;
	readonly body: ts.Node;
}

/** Exported values of a file by name: `export const x = …` and `export function x`. */
function exportsOf(source: ts.SourceFile): Door[] {
	return source.statements.flatMap((statement): Door[] => {
		const isExported =
			ts.canHaveModifiers(statement) &&
			ts.getModifiers(statement)?.some(({ kind }) => kind === ts.SyntaxKind.ExportKeyword);
		if (!isExported) return [];
		if (ts.isFunctionDeclaration(statement)) {
			return [{ name: statement.name?.text ?? '', body: statement }];
		}
		if (!ts.isVariableStatement(statement)) return [];
		return statement.declarationList.declarations.map((declaration) => ({
			name: declaration.name.getText(source),
			body: declaration.initializer ?? declaration
		}));
	});
}

function callsOf(node: ts.Node, source: ts.SourceFile): string[] {
	const calls: string[] = [];
	const visit = (child: ts.Node) => {
		if (ts.isCallExpression(child)) calls.push(child.expression.getText(source));
		ts.forEachChild(child, visit);
	};
	visit(node);
	return calls;
}

/** Loads, each action by itself, and request handlers of a file. */
function doorsOf([file, text]: [string, string]): { id: string; calls: string[] }[] {
	const source = ts.createSourceFile(file, text, ts.ScriptTarget.Latest, true);
	const doors = exportsOf(source).flatMap(({ name, body }): Door[] => {
		if (name === 'load' || METHODS.includes(name)) return [{ name, body }];
		if (name !== 'actions' || !ts.isObjectLiteralExpression(body)) return [];
		return body.properties.map((property) => ({
			name: property.name?.getText(source) ?? '',
			body: property
		}));
	});
	return doors.map(({ name, body }) => ({ id: `${file} ${name}`, calls: callsOf(body, source) }));
}

const doors = routeFiles.flatMap(doorsOf).map((door) => ({ ...door, isOpen: door.id in OPEN }));

describe('ways into the server', () => {
	it('are found', () => {
		expect(doors.length).toBeGreaterThan(25);
		expect(doors.filter(({ isOpen }) => isOpen).map(({ id }) => id)).toEqual(
			expect.arrayContaining(Object.keys(OPEN))
		);
	});

	it.each(doors.filter(({ isOpen }) => !isOpen))('$id asks who is there', ({ calls }) => {
		expect(calls.some((call) => call === 'operation' || call === 'requireActor')).toBe(true);
	});

	it('take no data but through schemas', () => {
		const raw = doors.flatMap(({ id, calls }) =>
			calls
				.filter((call) => /request\.(json|text|formData|arrayBuffer|blob)$/.test(call))
				.map((call) => `${id}: ${call}`)
		);
		expect(raw).toEqual([]);
	});
});

describe('services', () => {
	/** Exported functions that act for somebody: they take an actor. */
	const acting = serviceFiles.flatMap(([file, text]) => {
		const source = ts.createSourceFile(file, text, ts.ScriptTarget.Latest, true);
		return exportsOf(source)
			.filter(
				({ body }) =>
					ts.isFunctionDeclaration(body) &&
					body.parameters.some((parameter) => parameter.type?.getText(source) === 'Actor')
			)
			.map(({ name, body }) => ({ id: `${file} ${name}`, calls: callsOf(body, source) }));
	});

	/** They read or write only what is the actor's own, or are called after the question was asked. */
	const OWN: Readonly<Record<string, string>> = {
		listProjects: 'lists what the actor is a member of',
		getSignedIn: 'reads the actor',
		signOut: 'ends a session of the actor',
		signOutEverywhere: 'ends sessions of the actor',
		changePassword: 'asks for the password of the actor',
		insertFloorplan: 'called by createFloorplan and the demo',
		addDemoFloorplan: 'asks through createFloorplan',
		floorplanFile: 'asks through getFloorplan',
		cancel: 'asks itself',
		enqueueMissing: 'called by requestSolves, freeze and solveRevision'
	};

	it.each(acting.filter(({ id }) => !((id.split(' ')[1] ?? '') in OWN)))(
		'$id asks what its actor may do',
		({ calls }) => {
			expect(calls.some((call) => call === 'requireAccess' || call === 'requireEdit')).toBe(true);
		}
	);
});
