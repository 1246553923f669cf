import { diePoint, screenPoint, toDie, type DiePoint, type Editor } from '#lib/editor/index.ts';
import type { PointerInput, ScreenPoint } from '#lib/editor/index.ts';

/** Factor of a zoom per wheel unit, as an exponent. */
const WHEEL_ZOOM = 0.0064;
/** A line of wheels that count in lines, px. */
const LINE_PX = 16;

/** What the canvas shows of the hand. */
export interface HandState {
	readonly isSpaceHeld: boolean;
	readonly isPanning: boolean;
}

/**
 * Turns pointer and wheel events into calls of the editor. One pointer works the tool; the middle
 * button, or any button with Space held, drags the sheet; two fingers pan and zoom. The wheel pans,
 * and zooms at the pointer with Ctrl, which is also how a pinch on a touchpad arrives.
 */
export class PointerAdapter {
	readonly #editor: Editor;
	readonly #element: HTMLElement;
	readonly #onHand: (state: HandState) => void;
	readonly #onPoint: (place: DiePoint | null) => void;
	/** Fingers on the canvas, in CSS px of the page. */
	readonly #touches = new Map<number, readonly [x: number, y: number]>();
	#panFrom: readonly [x: number, y: number] | null = null;
	#isSpaceHeld = false;
	/** A pinch has begun: until all fingers are up no tool hears of them. */
	#isPinch = false;

	constructor(
		editor: Editor,
		element: HTMLElement,
		onHand: (state: HandState) => void,
		onPoint: (place: DiePoint | null) => void
	) {
		this.#editor = editor;
		this.#element = element;
		this.#onHand = onHand;
		this.#onPoint = onPoint;
	}

	#told(): void {
		this.#onHand({ isSpaceHeld: this.#isSpaceHeld, isPanning: this.#panFrom !== null });
	}

	#pointOf({ clientX, clientY }: { clientX: number; clientY: number }): ScreenPoint {
		const box = this.#element.getBoundingClientRect();
		return screenPoint(clientX - box.left, clientY - box.top);
	}

	#inputOf(event: PointerEvent): PointerInput {
		return { point: this.#pointOf(event), isAdding: event.shiftKey, isFree: event.altKey };
	}

	down(event: PointerEvent): void {
		this.#element.focus({ preventScroll: true });
		// A right click gives up what is going on; it never begins anything.
		if (event.button === 2) return this.#giveUp();
		this.#element.setPointerCapture(event.pointerId);
		if (event.pointerType === 'touch') {
			this.#touches.set(event.pointerId, [event.clientX, event.clientY]);
			if (this.#touches.size === 2) {
				this.#isPinch = true;
				this.#giveUp();
			}
			if (this.#isPinch) return;
		}
		if (event.button === 1 || this.#isSpaceHeld) {
			this.#panFrom = [event.clientX, event.clientY];
			event.preventDefault();
			return this.#told();
		}
		if (event.button === 0) this.#editor.pointerDown(this.#inputOf(event));
	}

	move(event: PointerEvent): void {
		if (this.#isPinch) return this.#pinch(event);
		const input = this.#inputOf(event);
		const [xUm, yUm] = toDie(this.#editor.camera, input.point);
		this.#onPoint(diePoint(xUm, yUm));
		if (this.#panFrom) {
			const [x, y] = this.#panFrom;
			this.#editor.pan(event.clientX - x, event.clientY - y);
			this.#panFrom = [event.clientX, event.clientY];
			return;
		}
		this.#editor.pointerMove(input);
	}

	up(event: PointerEvent): void {
		this.#touches.delete(event.pointerId);
		if (this.#isPinch) {
			this.#isPinch = this.#touches.size > 0;
			return;
		}
		if (this.#panFrom) {
			this.#panFrom = null;
			return this.#told();
		}
		if (event.button === 0) this.#editor.pointerUp(this.#inputOf(event));
	}

	/** The system took the pointer away. */
	cancel(event: PointerEvent): void {
		this.#touches.delete(event.pointerId);
		this.#isPinch = this.#isPinch && this.#touches.size > 0;
		this.#panFrom = null;
		this.#giveUp();
		this.#told();
	}

	leave(): void {
		this.#onPoint(null);
		this.#editor.pointerLeave();
	}

	/** The window has lost the focus: no mode stays stuck. */
	blur(): void {
		this.#isSpaceHeld = false;
		this.#panFrom = null;
		this.#told();
	}

	space(isHeld: boolean): void {
		this.#isSpaceHeld = isHeld;
		if (!isHeld) this.#panFrom = null;
		this.#told();
	}

	wheel(event: WheelEvent): void {
		event.preventDefault();
		const unit = event.deltaMode === WheelEvent.DOM_DELTA_LINE ? LINE_PX : 1;
		const [dx, dy] = [event.deltaX * unit, event.deltaY * unit];
		if (event.ctrlKey || event.metaKey) {
			this.#editor.zoom(this.#pointOf(event), Math.exp(-dy * WHEEL_ZOOM));
		} else if (event.shiftKey && dx === 0) {
			this.#editor.pan(-dy, 0);
		} else {
			this.#editor.pan(-dx, -dy);
		}
	}

	#pinch(event: PointerEvent): void {
		if (!this.#touches.has(event.pointerId) || this.#touches.size !== 2) return;
		const [a, b] = [...this.#touches.values()];
		this.#touches.set(event.pointerId, [event.clientX, event.clientY]);
		const [c, d] = [...this.#touches.values()];
		const middle = (p: typeof a, q: typeof a) => [(p[0] + q[0]) / 2, (p[1] + q[1]) / 2] as const;
		const [beforeX, beforeY] = middle(a, b);
		const [clientX, clientY] = middle(c, d);
		this.#editor.pan(clientX - beforeX, clientY - beforeY);
		const apart = Math.hypot(a[0] - b[0], a[1] - b[1]);
		const factor = apart === 0 ? 1 : Math.hypot(c[0] - d[0], c[1] - d[1]) / apart;
		this.#editor.zoom(this.#pointOf({ clientX, clientY }), factor);
	}

	#giveUp(): void {
		if (this.#editor.isBusy) this.#editor.cancel();
	}
}
