/**
 * The product's endpoints behind its hooks, served over loopback from the sources: what a browser or
 * a script would get, without building the pages first. Only the router stands in for the framework.
 */
import { createServer, type IncomingMessage, type ServerResponse } from 'node:http';
import type { AddressInfo } from 'node:net';
import { isRedirect, type Cookies, type RequestEvent, type RequestHandler } from '@sveltejs/kit';
import { getRequest, setResponse } from '@sveltejs/kit/node';
import { closeDatabase } from '#lib/server/db/client.ts';
import { HOOKS } from '#lib/server/hooks/index.ts';
import { closeRuntime } from '#lib/server/runtime.ts';

type Endpoint = Readonly<Record<string, unknown>>;

const METHODS = ['GET', 'POST', 'PUT', 'PATCH', 'DELETE'] as const;
const modules = import.meta.glob<Endpoint>('/src/routes/**/+server.ts', { eager: true });

export interface Route {
	/** As the framework names it: `/api/v1/jobs/[jobId]`. */
	readonly id: string;
	readonly methods: readonly string[];
	readonly pattern: RegExp;
	readonly parameters: readonly string[];
	readonly endpoint: Endpoint;
}

/** Every endpoint of the product. */
export const routes: readonly Route[] = Object.entries(modules).map(([file, endpoint]) => {
	const id = file
		.replace('/src/routes', '')
		.replace('/+server.ts', '')
		.replace(/\/\([^)]+\)/g, '');
	const parameters = [...id.matchAll(/\[(\w+)\]/g)].map(([, name]) => name);
	const pattern = new RegExp(`^${id.replace(/\[\w+\]/g, '([^/]+)')}$`);
	const methods = METHODS.filter((method) => method in endpoint);
	return { id, methods, pattern, parameters, endpoint };
});

function cookiesOf(request: Request, answer: Headers): Cookies {
	const sent = new Map(
		(request.headers.get('cookie') ?? '')
			.split(/;\s*/)
			.filter(Boolean)
			.map((pair) => [pair.slice(0, pair.indexOf('=')), pair.slice(pair.indexOf('=') + 1)] as const)
	);
	const write: Cookies['set'] = (name, value, options) => {
		const parts = [`${name}=${value}`, `Path=${options.path}`, `Max-Age=${options.maxAge ?? ''}`];
		if (options.httpOnly) parts.push('HttpOnly');
		if (options.secure) parts.push('Secure');
		if (options.sameSite) parts.push(`SameSite=${String(options.sameSite)}`);
		answer.append('set-cookie', parts.join('; '));
	};
	return {
		get: (name) => sent.get(name),
		getAll: () => [...sent].map(([name, value]) => ({ name, value })),
		set: write,
		delete: (name, options) => write(name, '', { ...options, maxAge: 0 }),
		serialize: (name, value) => `${name}=${value}`
	};
}

async function answer(request: Request): Promise<Response> {
	const url = new URL(request.url);
	const route = routes.find(({ pattern }) => pattern.test(url.pathname));
	const values = route?.pattern.exec(url.pathname)?.slice(1) ?? [];
	const headers = new Headers();
	// Those parts of an event that hooks and endpoints of ours use.
	const event = {
		request,
		url,
		params: Object.fromEntries(
			(route?.parameters ?? []).map((name, i) => [name, decodeURIComponent(values[i])])
		),
		route: { id: route?.id ?? null },
		locals: {} as App.Locals,
		cookies: cookiesOf(request, headers),
		getClientAddress: () => '127.0.0.1'
	} as unknown as RequestEvent;
	const handler = route?.endpoint[request.method] as RequestHandler | undefined;
	const resolve = async (): Promise<Response> => {
		if (!route) return new Response('Not found', { status: 404 });
		if (!handler) {
			return new Response('Method not allowed', {
				status: 405,
				headers: { allow: route.methods.join(', ') }
			});
		}
		const response = await Promise.resolve(event)
			.then(handler)
			.catch((thrown: unknown) => {
				if (!isRedirect(thrown)) throw thrown;
				return new Response(null, {
					status: thrown.status,
					headers: { location: thrown.location }
				});
			});
		return new Response(response.body, {
			status: response.status,
			headers: new Headers(response.headers)
		});
	};
	const chain = HOOKS.reduceRight<() => Promise<Response>>(
		(next, hook) => async () => hook({ event, resolve: next }),
		resolve
	);
	const response = await chain();
	for (const cookie of headers.getSetCookie()) response.headers.append('set-cookie', cookie);
	return response;
}

export interface ApiServer {
	readonly origin: string;
	/** `fetch` for whoever holds a session's token; paths are the product's own. */
	as(token: string | null): typeof fetch;
	close(): Promise<void>;
}

/** Serves the endpoints on a database. One per test file: the connection is the process's own. */
export async function startApiServer(databaseUrl: string): Promise<ApiServer> {
	process.env.DATABASE_URL = databaseUrl;
	const listener = async (incoming: IncomingMessage, outgoing: ServerResponse) => {
		try {
			const request = await getRequest({ request: incoming, base: origin });
			await setResponse(outgoing, await answer(request));
		} catch (error) {
			// What the framework does with an error that nobody expected.
			outgoing.writeHead(500).end(String(error));
		}
	};
	const server = createServer((incoming, outgoing) => void listener(incoming, outgoing));
	await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
	const origin = `http://127.0.0.1:${(server.address() as AddressInfo).port}`;
	process.env.ORIGIN = origin;
	return {
		origin,
		as: (token) => (input, init) => {
			const headers = new Headers(init?.headers);
			if (token !== null) headers.set('cookie', `manyweir=${token}`);
			return fetch(new URL(input instanceof Request ? input.url : input, origin), {
				...init,
				headers
			});
		},
		async close() {
			await closeRuntime();
			await closeDatabase();
			server.closeAllConnections();
			await new Promise((resolve) => server.close(resolve));
		}
	};
}
