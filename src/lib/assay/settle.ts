/**
 * From a table, its mapping and the answers to a run. Deterministic: the same input gives the same findings and the same run.
 * While a Stop or an Ask is open there is no run; nothing is assumed, and what was done to a value stands in `conversions`.
 */
import type { ChannelContent, RunContent } from '$lib/schemas/run';
import type { SpeciesContent } from '$lib/schemas/scheme';
import type {
	Answers,
	CellCorrection,
	GridWorkbook,
	Mapping,
	Settlement,
	TimeUnit
} from '$lib/schemas/sheet';
import { type Channel, settleChannels } from './channels';
import { askChargeApart } from './charge';
import { askCharge, checkCount } from './checks';
import { askControls } from './control-rows';
import { convertValues } from './conversions';
import { noteCopies } from './copies';
import { settleDecimal } from './decimal-rule';
import { type Checks, CHECKS, Examination } from './examination';
import { noteHeaders, noteSpreads, noteUnnamed } from './header-notes';
import { askHidden } from './hidden';
import { statedLimits } from './limits';
import { massBalance } from './mass-balance';
import { asOnSheet, turnBlock } from './orientation';
import { plausibility } from './plausibility';
import { averageColumns } from './replicate-columns';
import { samplesOf, timeColumn } from './samples';
import { askSecondTimes } from './second-times';
import { askBlock, dataRows, noteColours, noteFooters, noteMergesAndDates, noteWithin } from './structure';
import { headersOf, headlessBelow, tableOf, viewOf, votesOf } from './tables';
import { temperatureLog, type TemperatureLog } from './temperature-log';
import { timeColumnByHeader } from './time-column';
import { settleTimeParts } from './time-parts';
import { settleTimes } from './time-rules';
import { type Point, pointsOf, settleReplicates } from './timepoints';
import { settleValues } from './value-rules';

export interface SettleInput {
	workbook: GridWorkbook;
	species: SpeciesContent[];
	mapping: Mapping;
	answers?: Answers;
	corrections?: CellCorrection[];
	checks?: Partial<Checks>;
	/** Constants that the fit of this run alone would have to find. */
	parameters?: number;
}

export function settle(input: SettleInput): Settlement {
	const checks = { ...CHECKS, ...input.checks };
	const ex = new Examination(
		input.workbook,
		input.mapping,
		input.species,
		input.answers,
		input.corrections,
		checks,
		viewOf(input.workbook, input.mapping.sheet, input.mapping.across !== undefined)
	);
	const found = tableOf(ex.workbook, ex.mapping);
	const headers = headersOf(ex.view, ex.mapping);
	settleStructure(ex, found, headers);
	const rows = dataRows(ex);
	const hidden = askHidden(ex, rows);
	const shown = rows.filter((r) => !hidden.has(r));
	const controls = askControls(ex, shown);
	const used = shown.filter((r) => !controls.has(r));
	const channels = settleChannels(ex, headers);
	stopWithoutColumns(ex, channels);
	settleTimeParts(ex, used);
	askSecondTimes(ex, used, headers);
	const samples = samplesOf(ex, used, channels);
	const times = settleTimes(ex, samples, headers, channels);
	const marked = noteColours(ex, used);
	const limits = statedLimits(ex.view, viewOf(ex.workbook, ex.sheet) ?? ex.view, found, ex.decimal);
	const values = settleValues(
		ex,
		times.samples.map((t) => t.sample),
		channels,
		limits,
		marked
	);
	const read = averageColumns(ex, pointsOf(ex, times.samples, times.unit, channels, values), channels);
	const points = settleReplicates(ex, read, times.unit);
	const { channels: contents, complete } = convertValues(ex, channels, points);
	askCharge(ex, points, channels);
	if (complete) askChargeApart(ex, points, contents);
	checkCount(ex, points, channels, input.parameters ?? null);
	noteCopies(ex, points, channels);
	noteMergesAndDates(ex, used, timeColumn(ex));
	noteFooters(ex, found?.footerRows.map((f) => f.row) ?? []);
	noteWithin(ex, found?.withinRows ?? []);
	const log = temperatureLog(ex, points);
	const balance = complete ? massBalance(ex, points, contents, times.unit) : null;
	askConditions(ex);
	const open = ex.findings.filter((f) => f.open).length;
	const ready =
		open === 0 && complete && ex.needs.length === 0 && points.every((p) => p.time !== null && !p.unsettled);
	return {
		findings: sortFindings(ex.findings),
		open,
		needs: ex.needs,
		mapping: asOnSheet(ex.mapping),
		preview: points.map(preview),
		conversions: ex.conversions,
		massBalance: balance,
		plausibility: plausibility(points, contents, times.unit),
		rest: times.rest && (ex.places.across ? turnBlock(times.rest) : times.rest),
		run: ready ? runOf(ex, points, contents, times.unit, log) : null
	};
}

function settleStructure(
	ex: Examination,
	found: ReturnType<typeof tableOf>,
	headers: ReturnType<typeof headersOf>
): void {
	const { mapping } = ex;
	settleDecimal(ex, votesOf(ex.workbook, mapping));
	const byHeader = timeColumnByHeader(ex.view, mapping.headerRows, mapping.block);
	ex.timesInNames = byHeader !== timeColumn(ex);
	const moved =
		!found ||
		found.block.firstRow !== mapping.block.firstRow ||
		found.block.lastRow !== mapping.block.lastRow;
	const doubtful = found?.footerRows.filter((f) => f.why === 'unsure').map((f) => f.row) ?? [];
	askBlock(ex, {
		blank: moved ? [] : found.leftOutRows.filter((r) => !found.withinRows.includes(r)),
		doubtfulRows: moved ? [] : doubtful,
		further: goesOnBelow(ex),
		time: timeColumn(ex),
		timeByHeader: byHeader > 0 || (moved && !namesTimes(ex)),
		headers: moved || mapping.headerRows.length > 0
	});
	const joined = [...headers.values()].filter((h) => h.group !== undefined);
	noteHeaders(ex, joined);
	noteSpreads(ex, headers);
	noteUnnamed(ex, headers, dataRows(ex).slice(0, 500));
}

/** Rows without a header below the block whose times are later than its last. */
function goesOnBelow(ex: Examination): ReturnType<typeof headlessBelow> {
	if (ex.places.across) return null;
	const below = headlessBelow(ex.workbook, ex.mapping);
	const time = timeColumn(ex);
	if (!below || time === 0) return null;
	const [last, next] = [ex.time(ex.mapping.block.lastRow, time), ex.time(below.firstRow, time)];
	const later =
		last.kind === 'number' && next.kind === 'number' ? next.value > last.value : last.kind === next.kind;
	return later ? below : null;
}

/** The first name that is read as a time, of a column that is not headed as one. */
function namesTimes(ex: Examination): boolean {
	const column = timeColumn(ex);
	return (
		ex.timesInNames &&
		dataRows(ex).some((r) => /[a-z]/i.test(ex.shown(r, column)) && ex.time(r, column).kind === 'worded')
	);
}

/** A mapping without a time column, or without anything measured, is no run. */
function stopWithoutColumns(ex: Examination, channels: Channel[]): void {
	const cells = [ex.at(ex.mapping.block.firstRow, ex.mapping.block.firstColumn)];
	if (timeColumn(ex) === 0)
		ex.ask({
			rule: 'B1',
			level: 'stop',
			cells,
			key: 'time',
			found: 'no time column',
			expected: 'one column of times',
			message: 'No column is marked as time. Choose the one that holds the sampling times.'
		});
	const open = ex.findings.some((f) => f.open && (f.rule === 'B32' || f.rule === 'B3'));
	if (channels.length === 0 && !open)
		ex.ask({
			rule: 'B32',
			level: 'stop',
			cells,
			key: 'none',
			found: 'no column with values of a species',
			expected: 'at least one',
			message: 'No column is read as a species. Choose at least one.'
		});
}

function askConditions(ex: Examination): void {
	const conditions = ex.mapping.conditions;
	if (!conditions?.temperature)
		ex.needs.push({ field: 'temperature', message: 'At what temperature was the run held?' });
	const b33 = ex.findings.some((f) => f.rule === 'B33');
	if (Object.keys(conditions?.initial ?? {}).length === 0 && !b33)
		ex.needs.push({ field: 'initial', message: 'What was charged at time zero, and how much?' });
}

const RANK = { stop: 0, ask: 1, note: 2 };

const sortFindings = (findings: Examination['findings']) =>
	findings
		.map((f, i) => ({ f, i }))
		.sort((a, b) => RANK[a.f.level] - RANK[b.f.level] || a.i - b.i)
		.map(({ f }) => f);

const preview = (p: Point) => ({
	row: p.row,
	time: p.time,
	...(p.sampleId ? { sampleId: p.sampleId } : {}),
	values: Object.fromEntries(p.values)
});

function runOf(
	ex: Examination,
	points: Point[],
	channels: ChannelContent[],
	unit: TimeUnit,
	log: TemperatureLog
): RunContent | null {
	const conditions = ex.mapping.conditions;
	if (!conditions?.temperature || log.open) return null;
	const ids = new Set(channels.map((c) => c.id));
	// Replicate columns kept apart are samples at equal times, whatever was said of rows.
	const beside = new Set(points.map((p) => p.time)).size < points.length;
	const replicates = ex.mapping.replicates ?? (beside ? 'samples' : null);
	return {
		temperature: conditions.temperature,
		...(log.rows.length > 1
			? { temperatureLog: log.rows.map(({ time, celsius }) => ({ time, celsius })) }
			: {}),
		initial: conditions.initial,
		excess: conditions.excess,
		timeUnit: unit,
		...(conditions.timeOffset ? { timeOffset: conditions.timeOffset } : {}),
		...(conditions.timeZero ? { timeZero: conditions.timeZero } : {}),
		channels,
		timepoints: points.map((p) => ({
			time: p.time ?? 0,
			values: Object.fromEntries([...p.values].filter(([id]) => ids.has(id))),
			source: {
				sheet: ex.sheet.slice(0, 64),
				...(ex.places.across ? { row: timeColumn(ex), column: p.row } : { row: p.row }),
				cells: Object.fromEntries([...p.cells].filter(([id]) => ids.has(id)))
			},
			...(p.sampleId ? { sampleId: p.sampleId } : {})
		})),
		...(ex.corrections.length ? { corrections: ex.corrections } : {}),
		...(replicates ? { replicates } : {}),
		...(ex.conversions.length
			? { conversions: ex.conversions.slice(0, 500).map((c) => c.slice(0, 400)) }
			: {})
	};
}
