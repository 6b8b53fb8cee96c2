/**
 * Heat and gas of a dosed first-order reaction, for cautions and never for clearance.
 *
 *     Xacc = (1 − e^(−k·td)) / (k·td)       share of the dosed reagent that is unreacted at the end of a constant dose
 *     ΔTad = (−ΔHr) · c / cp                adiabatic temperature rise
 *     MTSR = Tp + Xacc · ΔTad               maximum temperature of the synthesis reaction
 *     k(T) = k(Tref) · exp(−Ea/R · (1/T − 1/Tref))
 *
 * | symbol | name here | unit |
 * | --- | --- | --- |
 * | k | kPerH | 1/h |
 * | td | doseTimeH | h |
 * | ΔHr | reactionEnthalpyKJPerMol | kJ/mol, negative when heat is given off |
 * | c | limitingMolPerKg | mol/kg |
 * | cp | heatCapacityKJPerKgK | kJ/(kg·K) |
 *
 * The accumulation formula holds for pseudo-first-order kinetics with the other reagent in excess.
 * Source: Stoessel, Thermal Safety of Chemical Processes, Wiley-VCH 2008 (four-temperature scheme, accumulation, MTSR).
 */

/** Molar gas constant, J/(mol·K): exact, 2019 SI. */
export const GAS_CONSTANT = 8.314462618;

export function accumulation(kPerH: number, doseTimeH: number): number {
	const x = kPerH * doseTimeH;
	// −expm1(−x)/x keeps its digits where little reacts during the dose.
	return x === 0 ? 1 : -Math.expm1(-x) / x;
}

export const adiabaticRise = (
	reactionEnthalpyKJPerMol: number,
	limitingMolPerKg: number,
	heatCapacityKJPerKgK: number
): number => (-reactionEnthalpyKJPerMol * limitingMolPerKg) / heatCapacityKJPerKgK;

/** Factor k(T)/k(Tref) for an activation energy in J/mol. */
export function arrheniusFactor(energyJPerMol: number, temperatureC: number, referenceC: number): number {
	const t = temperatureC + 273.15;
	const ref = referenceC + 273.15;
	return Math.exp((-energyJPerMol / GAS_CONSTANT) * (1 / t - 1 / ref));
}

/**
 * Class of the published scheme from the order of the four temperatures (Stoessel 2008), or null where the
 * order fits none. Classification is made by process safety; this only names the order.
 */
export function temperatureOrderClass(mtsrC: number, mttC: number, td24C: number): 1 | 2 | 3 | 4 | 5 | null {
	if (td24C <= mtsrC && td24C <= mttC) return 5;
	if (mtsrC < mttC && mttC <= td24C) return 1;
	if (mtsrC < td24C && td24C < mttC) return 2;
	if (mttC <= mtsrC && mtsrC < td24C) return 3;
	if (mttC < td24C && td24C <= mtsrC) return 4;
	return null;
}
