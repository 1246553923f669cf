import { addItems, freeId } from '#lib/floorplan/edits/index.ts';
import { onGridUm, type Regulator } from '#lib/floorplan/index.ts';
import { snapToSite } from '#lib/floorplan/legality/index.ts';
import { orientedSize } from '#lib/geometry/index.ts';
import { toDie } from '../../camera.ts';
import type { PointerInput } from '../../input.ts';
import { diePoint, type DiePoint } from '../../points.ts';
import { nudgeStepUm } from '../../snapping.ts';
import type { ToolHost, ToolState } from '../tool.ts';

/** What the next regulators are: everything but their place and id. */
export type RegulatorTemplate = Pick<Regulator, 'cell' | 'input' | 'output' | 'orient'>;

/** Sites per arrow key with Shift. */
const LARGE_STEPS = 10;

/**
 * A ghost of a new regulator follows the pointer or the arrow keys, on sites, with what speaks
 * against the place. A click or Enter places it where that is legal, and with the modifier that
 * suspends snapping anywhere; Escape ends. It begins in the middle of the view, so that keys are
 * enough.
 */
export function placing(host: ToolHost, template: RegulatorTemplate): ToolState {
	let ghost = regulatorAt(diePoint(host.camera.centreXUm, host.camera.centreYUm), false);
	let isPressed = false;

	function regulatorAt([xUm, yUm]: DiePoint, isFree: boolean): Regulator {
		const cell = host.floorplan.cells.find(({ id }) => id === template.cell);
		const [width, height] = orientedSize(cell?.widthUm ?? 0, cell?.heightUm ?? 0, template.orient);
		// The pointer holds the ghost by its middle.
		const corner = [xUm - width / 2, yUm - height / 2] as const;
		const [x, y] = isFree ? corner.map(onGridUm) : snapToSite(host.floorplan, ...corner);
		const taken = new Set(host.floorplan.regulators.map(({ id }) => id));
		return {
			...template,
			id: freeId(taken, `${template.output}_1`),
			xUm: x,
			yUm: y,
			enabled: true,
			fixed: false,
			offsetV: 0
		};
	}

	function show(regulator: Regulator): void {
		ghost = regulator;
		host.showOverlay({ ghost: { regulator, reasons: host.reasonsAgainst(regulator) } });
	}

	function place(isForced: boolean): void {
		const reasons = host.reasonsAgainst(ghost);
		if (reasons.length > 0 && !isForced) {
			const why = reasons.map(({ message }) => message).join('; ');
			host.refuse(`Not placed: ${why}. Hold Alt to place it all the same.`);
			return;
		}
		const { id, xUm, yUm } = ghost;
		if (!host.execute(addItems(host.floorplan, 'regulators', [ghost]))) return;
		host.select([{ list: 'regulators', id }]);
		const next = regulatorAt(diePoint(xUm, yUm), true);
		show({ ...next, xUm, yUm });
	}

	function follow({ point, isFree }: PointerInput): void {
		show(regulatorAt(toDie(host.camera, point), isFree));
	}

	show(ghost);
	return {
		name: 'place.placing',
		pointerMove: follow,
		pointerDown(input) {
			isPressed = true;
			follow(input);
		},
		pointerUp(input) {
			// A press that was given up, or began elsewhere, places nothing.
			if (!isPressed) return;
			isPressed = false;
			follow(input);
			place(input.isFree);
		},
		arrow([x, y], isLarge) {
			const steps = isLarge ? LARGE_STEPS : 1;
			const [stepX, stepY] = nudgeStepUm(host.floorplan, [{ list: 'regulators', id: ghost.id }]);
			show({
				...ghost,
				xUm: onGridUm(ghost.xUm + x * steps * stepX),
				yUm: onGridUm(ghost.yUm + y * steps * stepY)
			});
		},
		confirm: () => place(false),
		cancel() {
			if (isPressed) {
				isPressed = false;
				return;
			}
			host.showOverlay({});
			host.leaveTool();
		}
	};
}
