import { readTheme, type PaintTheme } from '#lib/editor/paint/index.ts';

function readPage(): PaintTheme {
	const style = getComputedStyle(document.documentElement);
	return readTheme((property) => style.getPropertyValue(property));
}

/** The page's colours for painting; read anew when the theme changes. Made while a component is set up. */
export function followPaintTheme(): { readonly current: PaintTheme } {
	let current = $state.raw(readPage());
	$effect(() => {
		const observer = new MutationObserver(() => (current = readPage()));
		observer.observe(document.documentElement, { attributeFilter: ['data-theme'] });
		return () => observer.disconnect();
	});
	return {
		get current() {
			return current;
		}
	};
}

/** RGBA bytes as something that a canvas can draw. */
export function makeImage(
	pixels: Uint8ClampedArray<ArrayBuffer>,
	columns: number,
	rows: number
): CanvasImageSource {
	const canvas = document.createElement('canvas');
	canvas.width = columns;
	canvas.height = rows;
	canvas.getContext('2d')?.putImageData(new ImageData(pixels, columns, rows), 0, 0);
	return canvas;
}
