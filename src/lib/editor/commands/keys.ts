import type { Command } from './command.ts';
import { commands } from './commands.ts';

/** What of a keyboard event decides which command it is. */
export interface KeyPress {
	readonly key: string;
	readonly code: string;
	readonly ctrlKey: boolean;
	readonly metaKey: boolean;
	readonly shiftKey: boolean;
	readonly altKey: boolean;
}

/** A key press as `Mod+Shift+Key`, as commands name theirs. */
function nameOf({ key, code, ctrlKey, metaKey, shiftKey }: KeyPress): string {
	// Shift+1 is "!" or something else, by layout: the key itself counts.
	const digit = /^Digit(\d)$/.exec(code)?.[1];
	const isLetter = /^[a-z]$/i.test(key);
	const name =
		digit && (shiftKey || ctrlKey || metaKey) ? digit : isLetter ? key.toLowerCase() : key;
	const hasShift = shiftKey && (name.length > 1 || isLetter || digit !== undefined);
	return `${ctrlKey || metaKey ? 'Mod+' : ''}${hasShift ? 'Shift+' : ''}${name}`;
}

const byKey = new Map<string, Command>(
	commands.flatMap((command) => command.keys.map((key) => [key, command] as const))
);

/** The command of a key press, or undefined. */
export function commandOf(press: KeyPress): Command | undefined {
	return press.altKey ? undefined : byKey.get(nameOf(press));
}

/** Elements in which keys write text. */
const TEXT_ELEMENTS = new Set(['INPUT', 'TEXTAREA', 'SELECT']);

/** Whether a key press belongs to somebody who is typing: no command may take it. */
export function isTyping(
	target: { readonly tagName: string; readonly isContentEditable: boolean } | null,
	isComposing: boolean
): boolean {
	return (
		isComposing ||
		(target !== null && (TEXT_ELEMENTS.has(target.tagName) || target.isContentEditable))
	);
}

/** A command's keys for people: "Ctrl+Shift+Z". */
export function describeKeys(keys: readonly string[]): string {
	const WORDS: Readonly<Record<string, string>> = {
		Mod: 'Ctrl',
		ArrowLeft: '←',
		ArrowRight: '→',
		ArrowUp: '↑',
		ArrowDown: '↓',
		Escape: 'Esc'
	};
	return keys
		.map((key) =>
			key
				.split(/\+(?=.)/)
				.map((part) => WORDS[part] ?? (part.length === 1 ? part.toUpperCase() : part))
				.join('+')
		)
		.join(' or ');
}
