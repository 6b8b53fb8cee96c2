import type { ChargeLine, Scale } from '$lib/schemas/recipe';

/**
 * The charges table: what has to be weighed or measured at a scale.
 *
 *     n = m · w / M          amount of a material of assay w (w/w)
 *     V = m / ρ              volume of a liquid
 *     V = n / c              volume of a solution of concentration c
 *     n = m · c / ρ          amount in a solution that is weighed
 *     eq = n / n(limiting)
 *
 * | symbol | name here | unit |
 * | --- | --- | --- |
 * | m | massKg | kg |
 * | n | amountMol | mol |
 * | M | molarMassGPerMol | g/mol |
 * | w | assayPercent / 100 | 1 |
 * | ρ | densityKgPerL | kg/L |
 * | V | volumeL | L |
 *
 * A figure whose inputs are missing is null, never zero. Volumes are added without a volume of mixing.
 */
export interface ChargeFigures {
	id: string;
	massKg: number | null;
	amountMol: number | null;
	equivalents: number | null;
	volumeL: number | null;
	/** Set for a solvent that fills the batch up: the volume of the whole mixture. */
	fillToL: number | null;
	/** What is missing for the figures that are null, in words. */
	missing: string[];
}

export interface ChargesTable {
	lines: ChargeFigures[];
	limiting: { id: string; amountMol: number; massKg: number } | null;
	totalMassKg: number | null;
	totalVolumeL: number | null;
	problems: string[];
}

const massOf = (line: ChargeLine, amountMol: number): number | null => {
	if (line.molarMassGPerMol === null) return null;
	return (amountMol * line.molarMassGPerMol) / 1000 / ((line.assayPercent ?? 100) / 100);
};
const amountOf = (line: ChargeLine, massKg: number): number | null => {
	if (line.molarMassGPerMol === null) return null;
	return (massKg * 1000 * ((line.assayPercent ?? 100) / 100)) / line.molarMassGPerMol;
};

/** Amount of the limiting material at the scale asked for, or why it cannot be said. */
function limitingAmount(line: ChargeLine, scale: Scale, concentration: number | null): number | string {
	if (scale.unit === 'mol') return scale.value;
	if (scale.unit === 'L')
		return concentration === null
			? 'A scale in litres needs the set-point concentration of the limiting material.'
			: scale.value * concentration;
	const massKg = scale.unit === 'kg' ? scale.value : scale.value / 1000;
	return amountOf(line, massKg) ?? `A scale in ${scale.unit} needs the molar mass of ${line.material}.`;
}

interface Reference {
	amountMol: number;
	massKg: number | null;
}

function solutionFigures(line: ChargeLine, amountMol: number): Partial<ChargeFigures> {
	const volumeL = amountMol / line.solutionMolPerL!;
	return {
		amountMol,
		volumeL,
		massKg: line.densityKgPerL === null ? null : volumeL * line.densityKgPerL
	};
}

function fromAmount(line: ChargeLine, amountMol: number): Partial<ChargeFigures> {
	if (line.solutionMolPerL !== null) return solutionFigures(line, amountMol);
	const massKg = massOf(line, amountMol);
	return {
		amountMol,
		massKg,
		volumeL: massKg === null || line.densityKgPerL === null ? null : massKg / line.densityKgPerL
	};
}

function fromMass(line: ChargeLine, massKg: number): Partial<ChargeFigures> {
	if (line.solutionMolPerL !== null) {
		// What a kilogram of solution holds follows from its concentration and density, not from the molar mass.
		if (line.densityKgPerL === null) return { massKg };
		return solutionFigures(line, (massKg / line.densityKgPerL) * line.solutionMolPerL);
	}
	return {
		massKg,
		amountMol: amountOf(line, massKg),
		volumeL: line.densityKgPerL === null ? null : massKg / line.densityKgPerL
	};
}

function fromVolume(line: ChargeLine, volumeL: number): Partial<ChargeFigures> {
	if (line.solutionMolPerL !== null) return solutionFigures(line, volumeL * line.solutionMolPerL);
	if (line.densityKgPerL === null) return { volumeL };
	return { ...fromMass(line, volumeL * line.densityKgPerL), volumeL };
}

function figuresOf(line: ChargeLine, reference: Reference): Partial<ChargeFigures> {
	const { measure } = line;
	switch (measure.by) {
		case 'limiting':
			return fromAmount(line, reference.amountMol);
		case 'equivalents':
			return fromAmount(line, measure.value * reference.amountMol);
		case 'volumes':
			return reference.massKg === null ? {} : fromVolume(line, measure.value * reference.massKg);
		case 'weight':
			return reference.massKg === null ? {} : fromMass(line, measure.value * reference.massKg);
		case 'fill to':
			return { fillToL: reference.amountMol / measure.value };
	}
}

function missingOf(line: ChargeLine, found: Partial<ChargeFigures>, reference: Reference): string[] {
	const missing: string[] = [];
	if (reference.massKg === null && (line.measure.by === 'volumes' || line.measure.by === 'weight'))
		missing.push('molar mass of the limiting material');
	if (found.fillToL !== undefined) return missing;
	if (line.solutionMolPerL === null && (found.amountMol ?? null) === null)
		missing.push(`molar mass of ${line.material}`);
	else if ((found.massKg ?? null) === null && line.solutionMolPerL === null)
		missing.push(`molar mass of ${line.material}`);
	if (
		line.solutionMolPerL !== null &&
		[found.massKg, found.amountMol].some((figure) => (figure ?? null) === null)
	)
		missing.push(`density of ${line.material}`);
	return missing;
}

/** The solvent that fills up: what is left of the mixture's volume when every other volume is known. */
function fillUp(lines: ChargeFigures[], byId: Map<string, ChargeLine>): void {
	const filled = lines.filter((f) => f.fillToL !== null);
	if (filled.length !== 1) return;
	const [target] = filled;
	const others = lines.filter((f) => f !== target);
	if (others.some((f) => f.volumeL === null)) {
		target.missing.push('a density for every other material; charge up to the stated volume instead');
		return;
	}
	const rest = target.fillToL! - others.reduce((sum, f) => sum + f.volumeL!, 0);
	if (rest < 0) {
		target.missing.push('room: the other materials already exceed the volume of the mixture');
		return;
	}
	const line = byId.get(target.id)!;
	Object.assign(target, fromVolume(line, rest));
}

const total = (values: (number | null)[]): number | null =>
	values.length === 0 || values.includes(null) ? null : values.reduce<number>((a, b) => a + b!, 0);

/**
 * Every charge at a scale. Errors are returned as `problems`, so that a table in work still shows what can be said.
 * @param concentrationMolPerL set-point concentration of the limiting material, where the recipe has one
 */
export function chargesAt(
	charges: readonly ChargeLine[],
	scale: Scale,
	concentrationMolPerL: number | null = null
): ChargesTable {
	const limiting = charges.filter((c) => c.measure.by === 'limiting');
	if (limiting.length !== 1)
		return emptyTable([
			limiting.length === 0
				? 'Mark one material as the limiting one: every other charge is reckoned from it.'
				: 'Only one material can be the limiting one.'
		]);
	const amount = limitingAmount(limiting[0], scale, concentrationMolPerL);
	if (typeof amount === 'string') return emptyTable([amount]);
	const reference: Reference = { amountMol: amount, massKg: massOf(limiting[0], amount) };
	const lines = charges.map((line): ChargeFigures => {
		const found = figuresOf(line, reference);
		return {
			id: line.id,
			massKg: found.massKg ?? null,
			amountMol: found.amountMol ?? null,
			equivalents: found.amountMol == null ? null : found.amountMol / reference.amountMol,
			volumeL: found.volumeL ?? null,
			fillToL: found.fillToL ?? null,
			missing: missingOf(line, found, reference)
		};
	});
	fillUp(lines, new Map(charges.map((c) => [c.id, c])));
	for (const f of lines) f.equivalents = f.amountMol === null ? null : f.amountMol / reference.amountMol;
	return {
		lines,
		limiting:
			reference.massKg === null ? null : { id: limiting[0].id, amountMol: amount, massKg: reference.massKg },
		totalMassKg: total(lines.map((l) => l.massKg)),
		totalVolumeL: lines.find((l) => l.fillToL !== null)?.fillToL ?? total(lines.map((l) => l.volumeL)),
		problems: []
	};
}

const emptyTable = (problems: string[]): ChargesTable => ({
	lines: [],
	limiting: null,
	totalMassKg: null,
	totalVolumeL: null,
	problems
});
