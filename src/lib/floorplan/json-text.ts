import { MAX_NESTING } from './canonical.ts';

/** What is wrong with the text of a JSON file, and where; line and column count from 1. */
export interface JsonFault {
	readonly line: number;
	readonly column: number;
	readonly message: string;
}

class Fault extends Error {
	readonly at: number;

	constructor(at: number, message: string) {
		super(message);
		this.at = at;
	}
}

const QUOTE = 0x22;
const BACKSLASH = 0x5c;
const NUMBER = /-?(?:0|[1-9][0-9]*)(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?/y;
const WORD = /true|false|null/y;
const SPACE = /[ \t\n\r]*/y;
/** What stands in a text as it is: from the space up, save the quote and the backslash. */
const PLAIN = /[ !#-[\]-\uffff]*/y;
const ESCAPE = /\\(?:["\\/bfnrt]|u[0-9a-fA-F]{4})/y;

/**
 * First fault of a JSON text (RFC 8259), or null. Beside the grammar it refuses what a reader may
 * silently lose: an object with one key twice, and nesting deeper than any document needs. The
 * engine's own parser gives no position for most faults.
 */
export function findJsonFault(text: string): JsonFault | null {
	try {
		new Scanner(text).document();
		return null;
	} catch (error) {
		if (!(error instanceof Fault)) throw error;
		return { ...positionOf(text, error.at), message: error.message };
	}
}

function positionOf(text: string, at: number): { line: number; column: number } {
	let line = 1;
	let start = 0;
	for (let end = text.indexOf('\n'); end !== -1 && end < at; end = text.indexOf('\n', start)) {
		line++;
		start = end + 1;
	}
	return { line, column: at - start + 1 };
}

/** A recursive descent, kept shallow by MAX_NESTING. */
class Scanner {
	readonly #text: string;
	#at = 0;

	constructor(text: string) {
		this.#text = text;
	}

	document(): void {
		this.#skip(SPACE);
		this.#value(0);
		this.#skip(SPACE);
		if (this.#at < this.#text.length) this.#fail(`${this.#here()} after the end of the document`);
	}

	#value(depth: number): void {
		const first = this.#text[this.#at];
		if (first === '{' || first === '[') {
			if (depth >= MAX_NESTING) this.#fail(`nested deeper than ${MAX_NESTING}`);
			if (first === '{') this.#object(depth + 1);
			else this.#list(depth + 1);
		} else if (first === '"') {
			this.#string();
		} else if (!this.#skip(NUMBER) && !this.#skip(WORD)) {
			this.#fail(`${this.#here()} where a value should stand`);
		}
	}

	#object(depth: number): void {
		const keys = new Set<string>();
		this.#items('}', () => {
			const start = this.#at;
			if (this.#text[start] !== '"')
				this.#fail(`${this.#here()} where a key in quotes should stand`);
			this.#string();
			const key = JSON.parse(this.#text.slice(start, this.#at)) as string;
			if (keys.has(key)) {
				this.#at = start;
				this.#fail(`key ${JSON.stringify(key.slice(0, 64))} stands twice in one object`);
			}
			keys.add(key);
			this.#skip(SPACE);
			this.#expect(':');
			this.#skip(SPACE);
			this.#value(depth);
		});
	}

	#list(depth: number): void {
		this.#items(']', () => this.#value(depth));
	}

	/** From the opening bracket to the closing one, with commas between items. */
	#items(close: string, item: () => void): void {
		this.#at++;
		this.#skip(SPACE);
		if (this.#text[this.#at] === close) {
			this.#at++;
			return;
		}
		for (;;) {
			item();
			this.#skip(SPACE);
			if (this.#text[this.#at] === close) break;
			if (this.#text[this.#at] !== ',')
				this.#fail(`${this.#here()} where "," or "${close}" should stand`);
			this.#at++;
			this.#skip(SPACE);
		}
		this.#at++;
	}

	#string(): void {
		this.#at++;
		for (;;) {
			this.#skip(PLAIN);
			const code = this.#text.charCodeAt(this.#at);
			if (code === QUOTE) break;
			if (code !== BACKSLASH) this.#fail(`${this.#here()} inside a text`);
			if (!this.#skip(ESCAPE)) this.#fail('an escape that JSON does not know');
		}
		this.#at++;
	}

	#expect(character: string): void {
		if (this.#text[this.#at] !== character)
			this.#fail(`${this.#here()} where "${character}" should stand`);
		this.#at++;
	}

	/** Passes over a match; false where there is none of positive length. */
	#skip(pattern: RegExp): boolean {
		pattern.lastIndex = this.#at;
		const start = this.#at;
		if (pattern.test(this.#text)) this.#at = pattern.lastIndex;
		return this.#at > start;
	}

	/** What stands here, for a message. */
	#here(): string {
		const code = this.#text.codePointAt(this.#at);
		if (code === undefined) return 'the file ends';
		return code < 0x20 || code === 0x7f || (code >= 0x80 && code <= 0xa0)
			? `control character ${code.toString(16).padStart(4, '0').toUpperCase()}`
			: `"${String.fromCodePoint(code)}"`;
	}

	#fail(message: string): never {
		throw new Fault(this.#at, message);
	}
}
