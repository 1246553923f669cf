import type { ToolHost, ToolState } from '../tool.ts';
import { dragging } from './dragging.ts';
import { idle } from './idle.ts';
import { marquee } from './marquee.ts';
import { pressing } from './pressing.ts';
import type { SelectTransitions } from './transitions.ts';

/** The first state of the select tool: click, drag, marquee. */
export function selecting(host: ToolHost): ToolState {
	const go: SelectTransitions = {
		idle: () => host.enter(idle(host, go)),
		pressing: (start, pressed) => host.enter(pressing(host, go, start, pressed)),
		dragging: (start, grabbed) => host.enter(dragging(host, go, start, grabbed)),
		marquee: (start) => host.enter(marquee(host, go, start))
	};
	return idle(host, go);
}
