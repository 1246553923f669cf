import { toDie } from '../../camera.ts';
import { diePoint, type DiePoint } from '../../points.ts';
import type { ToolHost, ToolState } from '../tool.ts';

/** A step of an arrow key on screen, px, and with Shift. */
const STEP_PX = 8;
const LARGE_STEP_PX = 64;

/** The arrow keys, or a click, choose the place whose reading is shown; it stays there. */
export function probing(host: ToolHost): ToolState {
	let at = diePoint(host.camera.centreXUm, host.camera.centreYUm);
	const show = (place: DiePoint) => {
		at = place;
		host.showOverlay({ probe: place });
	};
	show(at);
	return {
		name: 'probe.reading',
		pointerUp({ point }) {
			show(toDie(host.camera, point));
		},
		arrow([x, y], isLarge) {
			const stepUm = (isLarge ? LARGE_STEP_PX : STEP_PX) / host.camera.pxPerUm;
			show(diePoint(at[0] + x * stepUm, at[1] + y * stepUm));
		},
		cancel() {
			host.showOverlay({});
			host.leaveTool();
		}
	};
}
