/** Puts text on the clipboard; falls back to a hidden field where the page is served without TLS. */
export async function copyText(text: string): Promise<boolean> {
	try {
		await navigator.clipboard.writeText(text);
		return true;
	} catch {
		const field = document.createElement('textarea');
		field.value = text;
		field.style.position = 'fixed';
		field.style.opacity = '0';
		document.body.append(field);
		field.select();
		const done = document.execCommand('copy');
		field.remove();
		return done;
	}
}

/** Hands a file to the browser's own download. */
export function saveFile(name: string, content: Blob): void {
	const url = URL.createObjectURL(content);
	const link = document.createElement('a');
	link.href = url;
	link.download = name;
	link.click();
	setTimeout(() => URL.revokeObjectURL(url), 10_000);
}
