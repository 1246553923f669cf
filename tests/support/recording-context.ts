/** One thing that was done with a canvas context: a call, or a drawing with the state that it used. */
export interface Recorded {
	readonly call: string;
	readonly values: readonly unknown[];
	/** The properties of the context at that moment, and its line dash. */
	readonly state: Readonly<Record<string, unknown>>;
}

/** Width of a letter in texts that are measured, px. */
const LETTER_PX = 6;

/**
 * A canvas context without a canvas: it writes down what is done with it, so that tests can tell
 * what would be seen. It knows save and restore; every letter is as wide as another.
 */
export function recordingContext(): {
	readonly context: CanvasRenderingContext2D;
	readonly recorded: readonly Recorded[];
	/** The recorded calls of a name. */
	calls(name: string): Recorded[];
} {
	const recorded: Recorded[] = [];
	let state: Record<string, unknown> = { globalAlpha: 1, lineDash: [] };
	const saved: Record<string, unknown>[] = [];
	const known: Record<string, (...values: unknown[]) => unknown> = {
		save: () => void saved.push({ ...state }),
		restore: () => {
			state = saved.pop() ?? state;
		},
		setLineDash: (dash) => {
			state = { ...state, lineDash: dash };
		},
		measureText: (text) => ({ width: String(text).length * LETTER_PX })
	};
	const target = new Proxy(
		{},
		{
			get(_target, name) {
				const property = String(name);
				if (property in state) return state[property];
				return (...values: unknown[]) => {
					recorded.push({ call: property, values, state });
					return known[property]?.(...values);
				};
			},
			set(_target, name, value) {
				state = { ...state, [String(name)]: value };
				return true;
			}
		}
	);
	return {
		context: target as CanvasRenderingContext2D,
		recorded,
		calls: (name) => recorded.filter(({ call }) => call === name)
	};
}
