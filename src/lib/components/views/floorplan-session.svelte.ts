import {
	floorplanEventSchema,
	type ApiClient,
	type FloorplanDetail
} from '#lib/contracts/index.ts';
import type { EditDraft } from '#lib/floorplan/edits/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { Editor } from '#lib/editor/index.ts';
import { EditorState } from '#lib/editor/editor-state.svelte.ts';
import { createEditStorage, SyncClient, type SyncState } from '#lib/editor/sync/index.ts';
import { floorplanTransport } from './floorplan-transport.ts';

interface SessionOptions {
	readonly detail: FloorplanDetail;
	readonly userId: string;
	readonly client: ApiClient;
	readonly canDraw: boolean;
	readonly canEditLoads: boolean;
	/** A job or result of this floorplan changed, or may have while the events were away. */
	readonly onChange: () => void;
	/** Others' edits have just arrived. */
	readonly onRemote: (by: string, label: string) => void;
}

function schedule(delayMs: number, callback: () => void): () => void {
	const timer = setTimeout(callback, delayMs);
	return () => clearTimeout(timer);
}

/** One open floorplan: its editor, kept in step with the server and its events. */
export class FloorplanSession {
	readonly state: EditorState;
	readonly #sync: SyncClient;
	readonly #events: EventSource;
	readonly #onOnline = () => this.#sync.retryNow();
	syncState = $state.raw<SyncState>() as SyncState;

	constructor({
		detail,
		userId,
		client,
		canDraw,
		canEditLoads,
		onChange,
		onRemote
	}: SessionOptions) {
		this.#sync = new SyncClient({
			document: detail.document,
			version: detail.version,
			transport: floorplanTransport(client, detail.id),
			storage: createEditStorage(localStorage, userId, detail.id),
			schedule,
			newId: () => crypto.randomUUID(),
			onChange: ({ document, remote }) => {
				this.syncState = this.#sync.state;
				if (document) this.state.editor.documentChanged(this.#sync.document);
				for (const edit of remote) onRemote(edit.by, edit.label);
			}
		});
		this.syncState = this.#sync.state;
		const editor = new Editor(
			this.#sync.document,
			{
				submit: (draft: EditDraft) => this.#sync.submit({ id: crypto.randomUUID(), ...draft })
			},
			canDraw,
			{ canEditLoads, schedule }
		);
		this.state = new EditorState(editor);
		this.#events = this.#listen(detail.id, onChange);
		addEventListener('online', this.#onOnline);
	}

	get floorplan(): Floorplan {
		return this.state.floorplan;
	}

	#listen(floorplanId: string, onChange: () => void): EventSource {
		const events = new EventSource(`/api/v1/floorplans/${encodeURIComponent(floorplanId)}/events`);
		// Also after each reconnection: what was missed is asked for.
		events.addEventListener('ready', () => {
			this.#sync.refresh();
			onChange();
		});
		for (const type of ['edit', 'job', 'result']) {
			events.addEventListener(type, (message: MessageEvent<string>) => {
				const parsed = floorplanEventSchema.safeParse(JSON.parse(message.data));
				if (!parsed.success) return;
				if (parsed.data.type === 'edit') this.#sync.remoteChanged(parsed.data.version);
				else onChange();
			});
		}
		return events;
	}

	/** The server's version that is on the screen; what has not been sent comes on top of it. */
	get version(): number {
		void this.syncState;
		return this.#sync.version;
	}

	retry(): void {
		this.#sync.retryNow();
	}

	resolve(conflictId: string, choice: 'mine' | 'theirs'): void {
		this.#sync.resolve(conflictId, choice);
	}

	dismiss(refusalId: string): void {
		this.#sync.dismiss(refusalId);
	}

	close(): void {
		this.state.editor.endBurst();
		this.#events.close();
		this.#sync.dispose();
		removeEventListener('online', this.#onOnline);
	}
}
