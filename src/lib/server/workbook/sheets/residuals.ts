import { at, literal, span, type SheetWriter } from '../sheet-writer';
import { SHEETS, TOLERANCE, type Layout } from '../layout';
import type { PlanPoint, RecalculationPlan } from '../plan';
import { toleranceOf } from './curves';

const FIRST = 12;

type Channel = RecalculationPlan['channels'][number][number];

/** Predicted − observed and the sum of squares, live from the rate constants, held against what the fit stored. */
export function writeResiduals(sheet: SheetWriter, plan: RecalculationPlan, layout: Layout): void {
	const { points, report } = plan;
	sheet.heading(1, 'Residuals');
	sheet.note(
		2,
		'Residual = observed − predicted. A value given as a limit counts only when the prediction lies beyond it.'
	);
	const last = FIRST + Math.max(1, points.length) - 1;
	sheet.header(FIRST - 1, [
		'Run',
		'Channel',
		'Time',
		'Time unit',
		'Kind',
		'Observed',
		'Sigma',
		'Predicted, live',
		'Predicted, stored',
		'Residual, live',
		'Weighted square',
		'Agrees'
	]);
	points.forEach((point, i) => writePoint(sheet, plan, layout, point, FIRST + i));
	sheet.row(4, ['', 'Live', 'Stored', 'Agrees']);
	const ssr = points.reduce((sum, p) => sum + weightedSquare(p), 0);
	sheet.text(5, 1, 'Weighted sum of squares');
	sheet.formula(5, 2, points.length ? `SUM(${span(FIRST, 11, last, 11)})` : '0', ssr);
	sheet.number(5, 3, report.weightedSsr);
	const stray = strayOfSum(plan);
	sheet.formula(5, 4, `ABS(B5-C5)<=${literal(TOLERANCE)}*ABS(C5)+${literal(1e-24 + stray)}`, true);
	sheet.row(6, ['Values counted', report.pointsUsed, '', 'Degrees of freedom', report.degreesOfFreedom]);
	sheet.text(7, 1, 'Residual standard error s');
	const hasS = report.residualStandardError !== null && report.degreesOfFreedom > 0;
	if (hasS) {
		sheet.formula(7, 2, 'SQRT(B5/E6)', Math.sqrt(ssr / report.degreesOfFreedom));
		sheet.number(7, 3, report.residualStandardError!);
		const strayOfS = stray > 0 ? stray / Math.sqrt(Math.max(ssr, stray) * report.degreesOfFreedom) : 0;
		sheet.formula(7, 4, `ABS(B7-C7)<=${literal(TOLERANCE)}*ABS(C7)+${literal(1e-24 + strayOfS)}`, true);
	} else sheet.text(7, 2, 'no degrees of freedom');
	sheet.row(8, ['Values given as a limit', report.pointsCensored]);
	sheet.text(9, 1, 'All agree');
	const all = [
		'D5',
		...(hasS ? ['D7'] : []),
		...(points.length ? [`AND(${span(FIRST, 12, last, 12)})`] : [])
	].join(',');
	sheet.formula(9, 2, `AND(${all})`, true);
	layout.checks.push({ sheet: SHEETS.residuals, cell: at(9, 2), agrees: true });
	sheet.finish(FIRST - 1);
}

function beyond(point: PlanPoint): boolean {
	if (point.kind === 'value') return true;
	return point.kind === 'below' ? point.predicted > point.observed : point.predicted < point.observed;
}
const weightedSquare = (p: PlanPoint): number =>
	beyond(p) ? ((p.observed - p.predicted) / p.sigma) ** 2 : 0;

function writePoint(
	sheet: SheetWriter,
	plan: RecalculationPlan,
	layout: Layout,
	point: PlanPoint,
	row: number
): void {
	const run = plan.runs[point.run];
	const channel = plan.channels[point.run][point.channel];
	sheet.row(row, [
		run.label,
		channel.id,
		point.recordedTime,
		run.timeUnit,
		point.kind,
		point.observed,
		point.sigma
	]);
	if (run.logged) sheet.number(row, 8, point.predicted);
	else sheet.formula(row, 8, prediction(plan, layout, point), point.predicted);
	sheet.number(row, 9, point.predicted);
	const gap = `F${row}-H${row}`;
	const formula = {
		value: gap,
		below: `IF(H${row}>F${row},${gap},0)`,
		above: `IF(H${row}<F${row},${gap},0)`
	}[point.kind];
	sheet.formula(row, 10, formula, beyond(point) ? point.observed - point.predicted : 0);
	const stray = strayOf(plan, point);
	sheet.formula(row, 11, `(J${row}/G${row})^2`, weightedSquare(point));
	sheet.formula(
		row,
		12,
		`ABS(H${row}-I${row})<=${literal(TOLERANCE)}*MAX(ABS(F${row}),ABS(I${row}),${literal(1e-12)})${stray > 0 ? `+${literal(stray)}` : ''}`,
		true
	);
}

/** f·Σ w c in the channel's unit; for area % its share of all that the detector sees. */
function prediction(plan: RecalculationPlan, layout: Layout, point: PlanPoint): string {
	const channels = plan.channels[point.run];
	const own = signal(plan, layout, point, point.channel);
	if (!channels[point.channel].areaPercent) return own;
	const area = channels.map((c, i) => (c.areaPercent ? i : -1)).filter((i) => i >= 0);
	const seen = new Set(area.flatMap((i) => Array.from(channels[i].species)));
	const unassayed = plan.species.flatMap((_, i) =>
		seen.has(i) ? [] : [layout.runs[point.run].concentration[point.time][i]]
	);
	const total = [...area.map((i) => signal(plan, layout, point, i)), ...unassayed].join('+');
	return `100*(${own})/(${total})`;
}

function signal(plan: RecalculationPlan, layout: Layout, point: PlanPoint, index: number): string {
	const channel = plan.channels[point.run][index];
	const cells = layout.runs[point.run].concentration[point.time];
	const sum = Array.from(channel.species, (s, i) => {
		const weight = channel.weights[i];
		return weight === 1 ? cells[s] : `${literal(weight)}*${cells[s]}`;
	}).join('+');
	const factor = responseOf(plan, layout, channel);
	return factor ? `${factor}*(${sum})` : sum;
}

/**
 * The response factor of a channel of one run: the cell on "Parameters" where that is the one which this run has, else the
 * run's own number, or nothing where the run states none.
 */
function responseOf(plan: RecalculationPlan, layout: Layout, channel: Channel): string | null {
	const id = `${channel.id}.responseFactor`;
	const { constant, terms } = channel.lnResponse;
	const own = Math.exp(constant);
	const listed = plan.parameters.find((p) => p.id === id)?.si;
	const same = listed !== undefined && Math.abs(listed - own) <= 1e-12 * own;
	if (terms.length > 0 || (same && own !== 1)) return layout.si.get(id) ?? null;
	return own === 1 ? null : literal(own);
}

/** By how much a prediction on "Verify" may stray in a run whose rates differ by many decades; 0 elsewhere. */
function strayOf(plan: RecalculationPlan, point: PlanPoint): number {
	const run = plan.runs[point.run];
	const tolerance = toleranceOf(run);
	if (run.logged || tolerance <= TOLERANCE) return 0;
	const channel = plan.channels[point.run][point.channel];
	if (channel.areaPercent) return 100 * tolerance;
	const charge = run.charge.reduce((sum, c) => sum + Math.abs(c.value), 0);
	const listed = plan.parameters.find((p) => p.id === `${channel.id}.responseFactor`)?.si ?? 1;
	const factor = channel.lnResponse.terms.length > 0 ? listed : Math.exp(channel.lnResponse.constant);
	return tolerance * charge * factor * channel.weights.reduce((sum, w) => sum + Math.abs(w), 0);
}

/** The same for the weighted sum of squares. */
const strayOfSum = (plan: RecalculationPlan): number =>
	plan.points.reduce((sum, p) => {
		const stray = strayOf(plan, p) / p.sigma;
		return sum + stray * (2 * Math.sqrt(weightedSquare(p)) + stray);
	}, 0);
