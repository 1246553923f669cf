import type { FloorplanEvent } from '#lib/contracts/index.ts';
import { requireAccess } from '../access/access.ts';
import type { Actor } from '../audit.ts';
import { isSessionOpen } from '../auth/session.ts';
import { database } from '../db/client.ts';
import { log } from '../log.ts';
import { eventBus, shutdownSignal } from '../runtime.ts';

/** A comment line this often keeps proxies from closing the stream, and asks for access again. */
const KEEP_ALIVE_MS = 15_000;
/** What the browser waits before it connects again, ms. */
const RETRY_MS = 1000;

interface Reader {
	readonly floorplanId: string;
	readonly actor: Actor;
	readonly sessionId: string;
}

/** Whether the reader is still signed in and still sees the floorplan. */
async function mayListen({ floorplanId, actor, sessionId }: Reader): Promise<boolean> {
	if (!(await isSessionOpen(database(), sessionId))) return false;
	try {
		await requireAccess(database(), actor, 'project.view', { kind: 'floorplan', id: floorplanId });
		return true;
	} catch {
		return false;
	}
}

/** One reader's stream: everything that it is told goes through `#tell`, in order. */
class EventStream {
	readonly #reader: Reader;
	readonly #controller: ReadableStreamDefaultController<Uint8Array>;
	readonly #signals: readonly AbortSignal[];
	readonly #encoder = new TextEncoder();
	readonly #end = () => this.end();
	readonly #keepAlive = setInterval(() => this.#tell(': still here\n\n'), KEEP_ALIVE_MS);
	#unsubscribe = () => {};
	#hasEnded = false;
	#last: Promise<void> = Promise.resolve();

	constructor(
		reader: Reader,
		controller: ReadableStreamDefaultController<Uint8Array>,
		signals: readonly AbortSignal[]
	) {
		this.#reader = reader;
		this.#controller = controller;
		this.#signals = signals;
		for (const signal of signals) signal.addEventListener('abort', this.#end);
	}

	async open(): Promise<void> {
		this.#send(`retry: ${RETRY_MS}\n\n`);
		try {
			this.#unsubscribe = await eventBus().subscribe(this.#reader.floorplanId, {
				onEvent: (event) => this.#tell(textOf(event)),
				// The reader connects again and asks for what was missed.
				onGap: this.#end
			});
		} catch (error) {
			log.warn({ error }, 'event stream not opened');
			this.end();
		}
		// The reader may have left while the subscription was under way.
		if (this.#hasEnded) this.#unsubscribe();
		else this.#send('event: ready\ndata: {}\n\n');
	}

	end(): void {
		if (this.#hasEnded) return;
		this.#hasEnded = true;
		clearInterval(this.#keepAlive);
		this.#unsubscribe();
		for (const signal of this.#signals) signal.removeEventListener('abort', this.#end);
		try {
			this.#controller.close();
		} catch {
			// Closed from the reader's side already.
		}
	}

	/** Sends once it is known that the reader may still listen. */
	#tell(text: string): void {
		this.#last = this.#last.then(async () => {
			if (this.#hasEnded) return;
			const isAllowed = await mayListen(this.#reader).catch(() => false);
			if (isAllowed) this.#send(text);
			else this.end();
		});
	}

	#send(text: string): void {
		if (!this.#hasEnded) this.#controller.enqueue(this.#encoder.encode(text));
	}
}

function textOf(event: FloorplanEvent): string {
	return `event: ${event.type}\ndata: ${JSON.stringify(event)}\n\n`;
}

/**
 * The events of a floorplan as a stream of server-sent events. It ends when the reader leaves, when
 * the server stops, when events may have been missed, and when the reader may no longer see the
 * floorplan or has signed out. A reader who was away asks for the edits after its version; jobs and
 * results are read anew.
 */
export function eventStream(
	floorplanId: string,
	actor: Actor,
	sessionId: string,
	signal: AbortSignal
): Response {
	let events: EventStream | undefined;
	const stream = new ReadableStream<Uint8Array>({
		start(controller) {
			const signals = [signal, shutdownSignal];
			events = new EventStream({ floorplanId, actor, sessionId }, controller, signals);
			void events.open();
		},
		cancel() {
			events?.end();
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
