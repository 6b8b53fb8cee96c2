import type { SchemeContent } from '$lib/schemas/scheme';
import type { Direction } from './draft';

export interface ConstantSymbol {
	letter: 'k' | 'K';
	/** 2, −2 */
	index: string;
}

/** Symbols of the constants follow the order of the steps: k₁, k₂, k₋₂ and K₂. */
export function constantSymbol(
	content: SchemeContent,
	stepId: string,
	direction: Direction | 'equilibrium'
): ConstantSymbol {
	const n = content.steps.findIndex((s) => s.id === stepId) + 1;
	if (direction === 'equilibrium') return { letter: 'K', index: String(n) };
	return { letter: 'k', index: direction === 'forward' ? String(n) : `−${n}` };
}

/** "Step s2" of the engine's messages reads "Step 2", as the page numbers them. */
export function numbered(message: string, content: SchemeContent): string {
	return content.steps.reduce(
		(text, step, i) => text.replace(new RegExp(`\\b([Ss])tep ${step.id}\\b`, 'g'), `$1tep ${i + 1}`),
		message
	);
}
