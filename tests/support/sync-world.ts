import { applyOperations, type Edit } from '#lib/floorplan/edits/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import {
	createEditStorage,
	SyncClient,
	type EditsAnswer,
	type OutgoingEdit,
	type RemoteEdit,
	type StringStore,
	type SubmitAnswer,
	type Transport
} from '#lib/editor/sync/index.ts';

/** Numbers from 0 up to 1 from a seed (the generator of Tommy Ettinger known as mulberry32; from memory). */
export function seeded(seed: number): () => number {
	let state = seed | 0;
	return () => {
		state = (state + 0x6d2b79f5) | 0;
		let t = Math.imul(state ^ (state >>> 15), 1 | state);
		t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t;
		return ((t ^ (t >>> 14)) >>> 0) / 4294967296;
	};
}

/** The browser's storage, kept in memory; full when told so. */
export class MemoryStore implements StringStore {
	isFull = false;
	readonly #values = new Map<string, string>();

	get length(): number {
		return this.#values.size;
	}

	key(index: number): string | null {
		return [...this.#values.keys()][index] ?? null;
	}

	getItem(key: string): string | null {
		return this.#values.get(key) ?? null;
	}

	setItem(key: string, value: string): void {
		if (this.isFull) throw new Error('quota exceeded');
		this.#values.set(key, value);
	}

	removeItem(key: string): void {
		this.#values.delete(key);
	}
}

function copy<T>(value: T): T {
	return JSON.parse(JSON.stringify(value)) as T;
}

/** A server that does what the real one promises: edits in one order, each id once, conflicts found. */
export class SimulatedServer {
	document: Floorplan;
	readonly log: RemoteEdit[] = [];
	readonly pageSize = 3;
	/** Lets a test refuse an edit, such as for a missing permission. */
	refuses: (edit: Edit) => string | null = () => null;
	readonly listeners: ((version: number) => void)[] = [];

	constructor(document: Floorplan) {
		this.document = document;
	}

	get version(): number {
		return this.log.length;
	}

	submit(by: string, { baseVersion, ...edit }: OutgoingEdit): SubmitAnswer {
		const known = this.log.find(({ id }) => id === edit.id);
		if (known) return { status: 'accepted', version: known.version };
		if (baseVersion > this.version) throw new Error('an edit based on a version of the future');
		const reason = this.refuses(edit);
		if (reason !== null) return { status: 'refused', reason, problems: [] };
		const result = applyOperations(this.document, edit.operations);
		if (result.status === 'conflict') return { status: 'conflict' };
		if (result.status === 'refused') {
			return { status: 'refused', reason: 'not allowed', problems: result.problems };
		}
		this.document = result.floorplan;
		const version = this.version + 1;
		this.log.push({ ...edit, version, by, at: '2026-01-01T00:00:00Z' });
		for (const listener of this.listeners) listener(version);
		return { status: 'accepted', version };
	}

	editsAfter(version: number): EditsAnswer {
		const edits = this.log.slice(version, version + this.pageSize);
		return { status: 'edits', edits, hasMore: version + edits.length < this.version };
	}
}

/**
 * A server, a network that loses, doubles and reorders, timers and clients, all moved by hand: what
 * happens next is whatever the test delivers, so that a seed gives the same run every time.
 */
export class SyncWorld {
	readonly server: SimulatedServer;
	/** Requests, answers and events under way. */
	readonly messages: (() => void)[] = [];
	readonly timers = new Set<() => void>();
	/** Share of messages that meet a fault. */
	faults = 0;
	isOnline = true;
	readonly #random: () => number;
	#ids = 0;

	constructor(document: Floorplan, random: () => number) {
		this.server = new SimulatedServer(document);
		this.#random = random;
	}

	newId(): string {
		return `00000000-0000-4000-8000-${String(this.#ids++).padStart(12, '0')}`;
	}

	open(by: string, store: StringStore): SyncClient {
		const client: SyncClient = new SyncClient({
			document: copy(this.server.document),
			version: this.server.version,
			transport: this.#transport(by),
			storage: createEditStorage(store, by, 'plan'),
			schedule: (_delayMs, callback) => {
				this.timers.add(callback);
				return () => this.timers.delete(callback);
			},
			newId: () => this.newId(),
			onChange: () => undefined
		});
		this.server.listeners.push((version) => {
			if (!this.#fails()) this.messages.push(() => client.remoteChanged(version));
		});
		return client;
	}

	/** Delivers one message; by default the oldest. */
	async deliver(index = 0): Promise<void> {
		const [message] = this.messages.splice(index, 1);
		message?.();
		await this.flush();
	}

	async fireTimer(): Promise<void> {
		const [timer] = this.timers;
		if (timer) {
			this.timers.delete(timer);
			timer();
		}
		await this.flush();
	}

	/** Lets every promise that is settled take its effect. */
	async flush(): Promise<void> {
		for (let k = 0; k < 25; k++) await Promise.resolve();
	}

	/** Delivers and fires until nothing is under way. */
	async quiet(): Promise<void> {
		await this.flush();
		for (let k = 0; this.messages.length > 0 || this.timers.size > 0; k++) {
			if (k > 10_000) throw new Error('the clients never come to rest');
			if (this.messages.length > 0) await this.deliver();
			else await this.fireTimer();
		}
	}

	#fails(): boolean {
		return this.#random() < this.faults;
	}

	#transport(by: string): Transport {
		return {
			submit: (edit) => this.#request(copy(edit), (sent) => this.server.submit(by, copy(sent))),
			editsAfter: (version) =>
				this.#request(version, (after) => copy(this.server.editsAfter(after)))
		};
	}

	#request<Q, A>(
		question: Q,
		answer: (question: Q) => A
	): Promise<A | { status: 'unreachable'; reason: string }> {
		return new Promise((resolve) => {
			const lost = () => resolve({ status: 'unreachable', reason: 'no connection' });
			if (!this.isOnline || this.#fails()) {
				this.messages.push(lost);
				return;
			}
			this.messages.push(() => {
				const answered = answer(question);
				// The network delivers the request again, at some time.
				if (this.#fails()) this.messages.push(() => void answer(question));
				this.messages.push(this.#fails() ? lost : () => resolve(answered));
			});
		});
	}
}
