import type { FloorplanEvent } from '#lib/contracts/index.ts';
import { requireAccess } from '../access/access.ts';
import type { Actor } from '../audit.ts';
import { isSessionOpen } from '../auth/session.ts';
import { database } from '../db/client.ts';
import { eventBus, shutdownSignal } from '../runtime.ts';

/** A comment line this often keeps proxies from closing the stream, and asks for access again. */
const KEEP_ALIVE_MS = 15_000;
/** What the browser waits before it connects again, ms. */
const RETRY_MS = 1000;

/**
 * The events of a floorplan as a stream of server-sent events. It ends when the reader leaves, when
 * the server stops, and when the reader may no longer see the floorplan or has signed out. A reader
 * who was away asks for the edits after its version; jobs and results are read anew.
 */
export function eventStream(
	floorplanId: string,
	actor: Actor,
	sessionId: string,
	signal: AbortSignal
): Response {
	const encoder = new TextEncoder();
	let end = () => {};
	let unsubscribe = () => {};
	const stream = new ReadableStream<Uint8Array>({
		start(controller) {
			const send = (text: string) => controller.enqueue(encoder.encode(text));
			const deliver = async (event: FloorplanEvent) => {
				if (!(await mayListen())) return end();
				send(`event: ${event.type}\ndata: ${JSON.stringify(event)}\n\n`);
			};
			const mayListen = async () => {
				const isOpen = await isSessionOpen(database(), sessionId);
				if (!isOpen) return false;
				const subject = { kind: 'floorplan', id: floorplanId } as const;
				return requireAccess(database(), actor, 'project.view', subject).then(
					() => true,
					() => false
				);
			};
			const keepAlive = setInterval(() => {
				mayListen().then((isAllowed) => (isAllowed ? send(': still here\n\n') : end()), end);
			}, KEEP_ALIVE_MS);
			end = () => {
				end = () => {};
				clearInterval(keepAlive);
				unsubscribe();
				signal.removeEventListener('abort', stop);
				shutdownSignal.removeEventListener('abort', stop);
				controller.close();
			};
			const stop = () => end();
			signal.addEventListener('abort', stop);
			shutdownSignal.addEventListener('abort', stop);
			send(`retry: ${RETRY_MS}\n\n`);
			eventBus()
				.subscribe(floorplanId, (event) => void deliver(event).catch(() => end()))
				.then((stopListening) => {
					unsubscribe = stopListening;
					send('event: ready\ndata: {}\n\n');
				}, stop);
		},
		cancel() {
			end();
		}
	});
	return new Response(stream, {
		headers: {
			'content-type': 'text/event-stream',
			'cache-control': 'no-cache, no-transform',
			'x-accel-buffering': 'no'
		}
	});
}
