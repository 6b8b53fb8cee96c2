/** A text of its own: a slice would keep the whole piece alive that it was cut from. */
export const ownText = (text: string): string =>
	text.length < 13 ? text : Buffer.from(text, 'utf16le').toString('utf16le');
