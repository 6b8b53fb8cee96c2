/** Short answers at the foot of the page, and words for screen readers alone. */
export interface Toast {
	id: number;
	text: string;
	kind: 'note' | 'refusal';
	action?: { label: string; run: () => void };
}

let next = 1;
export const toasts = $state<{ list: Toast[]; spoken: string }>({ list: [], spoken: '' });

export function toast(text: string, kind: Toast['kind'] = 'note', action?: Toast['action']): void {
	const id = next++;
	toasts.list = [...toasts.list.slice(-2), { id, text, kind, action }];
	// A refusal stays until it is put away; nothing that needs reading leaves by itself.
	if (kind === 'note') setTimeout(() => dismiss(id), action ? 10_000 : 5_000);
}

export function dismiss(id: number): void {
	toasts.list = toasts.list.filter((t) => t.id !== id);
}

/** Said by a screen reader, not shown. The same words twice are said twice. */
export function announce(text: string): void {
	toasts.spoken = toasts.spoken === text ? `${text}\u00a0` : text;
}
