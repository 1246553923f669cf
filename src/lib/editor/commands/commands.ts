import type { Command } from './command.ts';
import { editCommands } from './edit.ts';
import { moveCommands } from './move.ts';
import { selectCommands } from './select.ts';
import { viewCommands } from './view.ts';

/** Everything that can be asked for, in the order of the help. */
export const commands: readonly Command[] = [
	...editCommands,
	...moveCommands,
	...selectCommands,
	...viewCommands
];

export function commandById(id: string): Command {
	const found = commands.find((command) => command.id === id);
	if (!found) throw new RangeError(`there is no command "${id}"`);
	return found;
}
