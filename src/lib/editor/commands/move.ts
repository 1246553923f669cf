import { LARGE_NUDGE } from '../editor.ts';
import type { Direction } from '../tools/tool.ts';
import type { Command } from './command.ts';

const ARROWS: readonly (readonly [word: string, key: string, direction: Direction])[] = [
	['left', 'ArrowLeft', [-1, 0]],
	['right', 'ArrowRight', [1, 0]],
	['up', 'ArrowUp', [0, 1]],
	['down', 'ArrowDown', [0, -1]]
];

/** The arrow keys move what the tool holds, else the selection by a grid step, else the view. */
export const moveCommands: readonly Command[] = [false, true].flatMap((isLarge) =>
	ARROWS.map(([word, key, direction]): Command => {
		const far = isLarge ? ` by ${LARGE_NUDGE} steps` : ' by a step';
		return {
			id: `nudge-${word}${isLarge ? '-far' : ''}`,
			label: `Move selection, ghost or probe ${word}${far}`,
			group: 'arrange',
			keys: [isLarge ? `Shift+${key}` : key],
			permission: null,
			isEnabled: () => true,
			run: (editor) => editor.arrow(direction, isLarge)
		};
	})
);
