import type { RecipeContent } from '$lib/schemas/recipe';

const TO_MOL_PER_L: Record<string, number> = { 'mol/L': 1, 'mmol/L': 1e-3, 'mol/m³': 1e-3, 'mol/m3': 1e-3 };

/** Set-point concentration of the limiting material in mol/L, or null where the recipe has none. */
export function concentrationOf(content: Pick<RecipeContent, 'charges' | 'setPoints'>): number | null {
	const limiting = content.charges.find((c) => c.measure.by === 'limiting');
	const point = content.setPoints.find(
		(s) => s.kind === 'charge' && s.species !== undefined && s.species === limiting?.species
	);
	const factor = point ? TO_MOL_PER_L[point.unit] : undefined;
	return point && factor !== undefined ? point.value * factor : null;
}
