/** Numbers, lists and counts as messages say them, and the options that many questions share. */
import type { FindingOption } from '$lib/schemas/sheet';

/** Up to six significant digits, for messages. */
export const figure = (n: number): string => String(Number(n.toPrecision(6)));

/** "A1, A2 and 3 more", for messages. */
export function someOf(items: string[], most = 4): string {
	if (items.length <= most) return items.join(', ');
	return `${items.slice(0, most - 1).join(', ')} and ${items.length - most + 1} more`;
}

export const plural = (n: number, one: string, many = one + 's'): string => `${n} ${n === 1 ? one : many}`;

export const capital = (text: string): string => text.charAt(0).toUpperCase() + text.slice(1);

/** The reason of an answer in brackets, for the record. */
export const because = (reason: string | undefined): string => (reason ? ` (${reason})` : '');

export const ENTER = (label = 'Enter the value'): FindingOption => ({
	key: 'enter',
	label,
	needsValue: [{ key: 'value', label: 'Value', kind: 'text' }]
});

export const MISSING: FindingOption = { key: 'missing', label: 'Leave as missing' };
