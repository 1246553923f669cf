/** Lets the browser save a text as a file. */
export function saveText(text: string, name: string, type: string): void {
	const link = document.createElement('a');
	link.href = URL.createObjectURL(new Blob([text], { type }));
	link.download = name;
	link.click();
	URL.revokeObjectURL(link.href);
}
