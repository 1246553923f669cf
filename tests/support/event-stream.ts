/** One open stream of server-sent events, read event by event. */
export interface OpenStream {
	/** The data of the next event of a type; others on the way are passed over. */
	next(type: string): Promise<unknown>;
	/** Fulfilled when the server has ended the stream. */
	readonly ended: Promise<void>;
	close(): void;
}

interface Message {
	readonly type: string;
	readonly data: unknown;
}

function parse(block: string): Message | null {
	const fields = new Map(
		block.split('\n').map((line) => {
			const colon = line.indexOf(': ');
			return [line.slice(0, colon), line.slice(colon + 2)] as const;
		})
	);
	const type = fields.get('event');
	return type === undefined ? null : { type, data: JSON.parse(fields.get('data') ?? 'null') };
}

/** Opens a stream and begins to read it. */
export async function readEvents(fetcher: typeof fetch, path: string): Promise<OpenStream> {
	const abort = new AbortController();
	const response = await fetcher(path, { signal: abort.signal });
	if (!response.ok || !response.body) throw new Error(`stream refused: ${response.status}`);
	const messages: Message[] = [];
	let wake = () => {};
	let hasEnded = false;
	const read = async (body: ReadableStream<Uint8Array>) => {
		const decoder = new TextDecoder();
		let text = '';
		for await (const chunk of body) {
			text += decoder.decode(chunk, { stream: true });
			const blocks = text.split('\n\n');
			text = blocks.pop() ?? '';
			messages.push(...blocks.flatMap((block) => parse(block) ?? []));
			wake();
		}
	};
	const ended = read(response.body)
		.catch(() => {
			// Aborted by us, or the connection was cut.
		})
		.then(() => {
			hasEnded = true;
			wake();
		});
	return {
		async next(type) {
			for (;;) {
				const message = messages.shift();
				if (message?.type === type) return message.data;
				if (message) continue;
				if (hasEnded) throw new Error(`the stream ended before an event "${type}"`);
				await new Promise<void>((resolve) => (wake = resolve));
			}
		},
		ended,
		close: () => abort.abort()
	};
}
