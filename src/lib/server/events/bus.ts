import type { FloorplanEvent } from '#lib/contracts/index.ts';
import type { Connection } from '../db/client.ts';
import { findJob } from '../jobs/job-rows.ts';
import { log } from '../log.ts';
import { EVENTS_CHANNEL, noticeSchema, type Notice } from './publish.ts';

type Listener = (event: FloorplanEvent) => void;

/**
 * Passes what changed in the database on to the event streams of this process. One connection
 * listens for all of them; postgres.js listens again by itself after the database was away.
 */
export class EventBus {
	readonly #connection: Connection;
	readonly #listeners = new Map<string, Set<Listener>>();
	#listening: Promise<unknown> | undefined;

	constructor(connection: Connection) {
		this.#connection = connection;
	}

	/** Calls back on every event of a floorplan until the returned function is called. */
	async subscribe(floorplanId: string, listener: Listener): Promise<() => void> {
		const listeners = this.#listeners.get(floorplanId) ?? new Set();
		this.#listeners.set(floorplanId, listeners);
		listeners.add(listener);
		this.#listening ??= this.#connection.sql.listen(EVENTS_CHANNEL, (payload) => {
			this.#receive(payload).catch((error: unknown) => log.error({ error }, 'event not delivered'));
		});
		try {
			await this.#listening;
		} catch (error) {
			this.#listening = undefined;
			listeners.delete(listener);
			throw error;
		}
		return () => {
			listeners.delete(listener);
			if (listeners.size === 0) this.#listeners.delete(floorplanId);
		};
	}

	async #receive(payload: string): Promise<void> {
		const notice = noticeSchema.parse(JSON.parse(payload));
		if (!this.#listeners.has(notice.floorplanId)) return;
		const event = await this.#toEvent(notice);
		if (!event) return;
		for (const listener of this.#listeners.get(notice.floorplanId) ?? []) listener(event);
	}

	async #toEvent(notice: Notice): Promise<FloorplanEvent | null> {
		if (notice.type !== 'job') {
			const { floorplanId: _addressee, ...event } = notice;
			return event;
		}
		const job = await findJob(this.#connection.db, notice.jobId);
		return job ? { type: 'job', job } : null;
	}
}
