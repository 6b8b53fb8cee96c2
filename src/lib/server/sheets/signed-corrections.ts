import type { CellCorrection } from '$lib/schemas/sheet';
import type { TableWork } from '$lib/schemas/sheet-work';
import type { Actor } from '../policy';

const sameCorrection = (a: CellCorrection, b: CellCorrection): boolean =>
	(['sheet', 'cell', 'original', 'corrected', 'reason'] as const).every((key) => a[key] === b[key]);

/**
 * Corrections carry who made them and when. One that lies with the sheet already keeps its signature; any other is signed
 * by who sends it, whatever name came along.
 */
export function signedCorrections(
	actor: Actor,
	corrections: CellCorrection[],
	stored: TableWork | undefined
): CellCorrection[] {
	const now = new Date().toISOString();
	return corrections.map((correction) => {
		const known = stored?.corrections.find((c) => sameCorrection(c, correction));
		return { ...correction, by: known?.by ?? actor.name, at: known?.at ?? now };
	});
}
