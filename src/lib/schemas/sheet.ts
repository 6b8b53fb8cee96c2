import { z } from 'zod';
import { fittable, id, quantity } from './quantity';
import { assayValue, correctionSchema, runContent } from './run';

/* ------------------------------------------------------------------ the grid, as received */

/** What one cell's number format makes of a number. */
export const FORMAT_KINDS = [
	'general',
	'number',
	'percent',
	'scientific',
	'fraction',
	'date',
	'time',
	'datetime',
	/** Elapsed time, [h]:mm and the like: does not wrap at 24 h. */
	'duration',
	'text'
] as const;
export type FormatKind = (typeof FORMAT_KINDS)[number];

export const cellStyleSchema = z.object({
	/** Format code as the file states it. */
	format: z.string().max(300),
	kind: z.enum(FORMAT_KINDS),
	/** Filled with a colour, written in one (other than black), or struck through. */
	coloured: z.boolean().optional(),
	struck: z.boolean().optional()
});
export type CellStyle = z.infer<typeof cellStyleSchema>;

export { CELL } from './cell-flags';

/**
 * [column, value, style, flags]: column counts from 1; style is an index into `workbook.styles` (0, plain, when left out);
 * flags are a sum of `CELL` bits (0 when left out). An error keeps its text ("#DIV/0!") with the error bit. Text is never
 * evaluated, whatever it begins with.
 */
export const gridCellSchema = z.union([
	z.tuple([z.int(), z.union([z.number(), z.string(), z.boolean(), z.null()])]),
	z.tuple([z.int(), z.union([z.number(), z.string(), z.boolean(), z.null()]), z.int()]),
	z.tuple([z.int(), z.union([z.number(), z.string(), z.boolean(), z.null()]), z.int(), z.int()])
]);
export type CellValue = number | string | boolean | null;
export type GridCell =
	| [column: number, value: CellValue]
	| [column: number, value: CellValue, style: number]
	| [column: number, value: CellValue, style: number, flags: number];

/** Rows without a cell are left out; `r` counts from 1 and increases; cells by increasing column. */
export const gridRowSchema = z.object({ r: z.int().positive(), c: z.array(gridCellSchema) });
export interface GridRow {
	r: number;
	c: GridCell[];
}

const span = z.tuple([z.int(), z.int()]);

export const gridSheetSchema = z.object({
	name: z.string(),
	state: z.enum(['visible', 'hidden', 'very hidden']),
	rows: z.array(gridRowSchema),
	/** [first row, first column, last row, last column], each counting from 1. */
	merges: z.array(z.tuple([z.int(), z.int(), z.int(), z.int()])),
	/** Hidden rows and columns as spans [first, last]. */
	hiddenRows: z.array(span),
	hiddenColumns: z.array(span),
	/** Range of an active filter. */
	filter: z.string().nullable(),
	lastRow: z.int(),
	lastColumn: z.int()
});
export interface GridSheet {
	name: string;
	state: 'visible' | 'hidden' | 'very hidden';
	rows: GridRow[];
	merges: [number, number, number, number][];
	hiddenRows: [number, number][];
	hiddenColumns: [number, number][];
	filter: string | null;
	lastRow: number;
	lastColumn: number;
}

/** A workbook as received: plain data, inert, small enough to travel to the page. */
export const gridWorkbookSchema = z.object({
	fileName: z.string(),
	kind: z.enum(['xlsx', 'text', 'paste']),
	dateSystem: z.union([z.literal(1900), z.literal(1904)]),
	/** Of a text file: how the bytes were read, and what parts the columns. */
	encoding: z.string().optional(),
	delimiter: z.string().optional(),
	styles: z.array(cellStyleSchema),
	sheets: z.array(gridSheetSchema),
	/** Chart sheets and other parts that hold no cells, by name. */
	otherSheets: z.array(z.string()).optional()
});
export interface GridWorkbook {
	fileName: string;
	kind: 'xlsx' | 'text' | 'paste';
	dateSystem: 1900 | 1904;
	encoding?: string;
	delimiter?: string;
	styles: CellStyle[];
	sheets: GridSheet[];
	otherSheets?: string[];
}

/* ------------------------------------------------------------------ mapping: what a person confirms */

/** Part of a sheet, rows and columns counting from 1. `headerRows` lie above `firstRow`. */
export const blockSchema = z.object({
	firstRow: z.int().min(1).max(1_048_576),
	lastRow: z.int().min(1).max(1_048_576),
	firstColumn: z.int().min(1).max(16_384),
	lastColumn: z.int().min(1).max(16_384)
});
export type Block = z.infer<typeof blockSchema>;

export const COLUMN_ROLES = [
	'time',
	/** One species, or a sum of several (weights). */
	'species',
	'temperature',
	'sample',
	'injection',
	'internal standard',
	/** Long layout: the name of the peak, and its value. */
	'peak',
	'value',
	'ignore'
] as const;
export type ColumnRole = (typeof COLUMN_ROLES)[number];

export const TIME_UNITS = ['s', 'min', 'h', 'd'] as const;
export type TimeUnit = (typeof TIME_UNITS)[number];

/** Units that a column of assay values may have. "%" alone is not among them: it needs its basis. */
export const VALUE_UNITS = [
	'mol/L',
	'mmol/L',
	'umol/L',
	'g/L',
	'mg/mL',
	'mg/L',
	'area %',
	'% of charge',
	'mol %',
	'fraction of charge',
	'% w/w',
	'area'
] as const;
export type ValueUnit = (typeof VALUE_UNITS)[number];

export const columnMappingSchema = z.strictObject({
	column: z.int().min(1).max(16_384),
	role: z.enum(COLUMN_ROLES),
	/** For role species: which species it sees and how strongly, {A: 1} or {A: 1, B: 1}. Empty: not matched yet. */
	weights: z.record(id, z.number()).optional(),
	/** One of TIME_UNITS for time, of VALUE_UNITS for species and value, degC or K for temperature; null: not known. */
	unit: z.string().max(40).nullable(),
	/** Relative response factor, molar basis, against the reference species (1). */
	responseFactor: z.number().positive().optional(),
	/** Lets the fit find the response factor (a signal in arbitrary units). */
	fitResponse: z.boolean().optional(),
	/** Limits in the column's own unit. */
	loq: z.number().positive().nullable().optional(),
	lod: z.number().positive().nullable().optional(),
	label: z.string().max(120).optional()
});
export type ColumnMapping = z.infer<typeof columnMappingSchema>;

/** Long layout: what each peak name stands for. */
export const peakMappingSchema = z.strictObject({
	peak: z.string().max(120),
	weights: z.record(id, z.number()).optional(),
	ignore: z.boolean().optional(),
	responseFactor: z.number().positive().optional(),
	fitResponse: z.boolean().optional(),
	loq: z.number().positive().nullable().optional(),
	lod: z.number().positive().nullable().optional()
});
export type PeakMapping = z.infer<typeof peakMappingSchema>;

/** Species in rows, times across the top: what each row of the block holds, and which columns head it. */
export const acrossSchema = z.strictObject({
	headerColumns: z.array(z.int().positive()).max(8),
	/** Columns inside the block that are no samples. */
	leftOutColumns: z.array(z.int().positive()).max(16_384).default([]),
	rows: z
		.array(columnMappingSchema.omit({ column: true }).extend({ row: z.int().min(1).max(1_048_576) }))
		.max(400)
});
export type Across = z.infer<typeof acrossSchema>;

/** Conditions of the run, asked of the person; the sheet may offer, it never decides. */
export const conditionsSchema = z.strictObject({
	temperature: quantity.nullable(),
	/** Charge by species: mol/L, or "%" when everything is relative to the charge. */
	initial: z.record(id, fittable),
	excess: z.record(id, quantity).default({}),
	timeZero: z.string().max(200).optional(),
	timeOffset: fittable.optional(),
	/** Whether fits take the measured log as the program of the run; left out: as its readings suggest. */
	useTemperatureLog: z.boolean().optional(),
	/** The sentence about the run that a person confirmed as seen in the lab, where the time unit was chosen by hand. */
	seenInLab: z.string().max(300).optional()
});
export type Conditions = z.infer<typeof conditionsSchema>;

export const mappingSchema = z.strictObject({
	/** Which table of the proposal this began as. */
	table: z.string().max(40),
	sheet: z.string().max(64),
	block: blockSchema,
	headerRows: z.array(z.int().positive()).max(8),
	layout: z.enum(['wide', 'long']),
	/** Several columns marked as time are parts of one time, such as hours and minutes. */
	columns: z.array(columnMappingSchema).max(400),
	/** Where times run across: then `headerRows`, `columns` and `leftOutRows` are empty, and this counts in their place. */
	across: acrossSchema.optional(),
	peaks: z.array(peakMappingSchema).max(400).optional(),
	/** Rows inside the block that are not data (blank, footers). */
	leftOutRows: z.array(z.int().positive()).max(20_000).default([]),
	decimal: z.enum(['.', ',']).nullable(),
	/** Solution density for % w/w. */
	densityGPerL: z.number().positive().nullable().optional(),
	internalStandard: quantity.nullable().optional(),
	/** IANA zone of date-time stamps; null: none of them lies near a clock change, or not known. */
	timeZone: z.string().max(64).nullable().optional(),
	replicates: z.enum(['samples', 'injections']).nullable().optional(),
	/** The same for several columns of one species: "A inj 1", "A inj 2". */
	columnReplicates: z.enum(['samples', 'injections']).nullable().optional(),
	conditions: conditionsSchema.optional()
});
export type Mapping = z.infer<typeof mappingSchema>;

/** A mapping kept for a lab group; applied only where the headers match exactly. */
export const savedMappingSchema = z.strictObject({
	name: z.string().trim().min(1).max(80),
	/** The header text of every column of the block, in order. */
	headers: z.array(z.string().max(200)).max(400),
	mapping: z.object({
		layout: z.enum(['wide', 'long']),
		columns: z.array(columnMappingSchema.omit({ column: true })).max(400),
		peaks: z.array(peakMappingSchema).max(400).optional(),
		densityGPerL: z.number().positive().nullable().optional(),
		internalStandard: quantity.nullable().optional(),
		timeZone: z.string().max(64).nullable().optional(),
		replicates: z.enum(['samples', 'injections']).nullable().optional(),
		columnReplicates: z.enum(['samples', 'injections']).nullable().optional(),
		/** The series are rows, not columns. */
		across: z.boolean().optional()
	})
});
export type SavedMapping = z.infer<typeof savedMappingSchema>;

/* ------------------------------------------------------------------ findings and answers */

export const FINDING_LEVELS = ['stop', 'ask', 'note'] as const;
export type FindingLevel = (typeof FINDING_LEVELS)[number];

/** A value that an option needs before it can be taken. */
export const valueFieldSchema = z.object({
	key: z.string().max(120),
	label: z.string(),
	kind: z.enum(['number', 'text', 'choice']),
	unit: z.string().optional(),
	choices: z.array(z.object({ key: z.string(), label: z.string() })).optional(),
	/** Offered, never assumed: where it was read is in `source`. */
	suggested: z.union([z.string(), z.number()]).optional(),
	source: z.string().optional()
});
export type ValueField = z.infer<typeof valueFieldSchema>;

export const findingOptionSchema = z.object({
	key: z.string().max(60),
	label: z.string(),
	needsValue: z.array(valueFieldSchema).optional()
});
export type FindingOption = z.infer<typeof findingOptionSchema>;

export const answerSchema = z.strictObject({
	/** Key of the option taken. */
	key: z.string().max(60),
	/** Its values by field key ("value" where there is one field). */
	values: z.record(z.string().max(120), z.union([z.string().max(200), z.number()])).optional(),
	reason: z.string().trim().max(500).optional()
});
export type Answer = z.infer<typeof answerSchema>;

/** Answers by finding id. */
export const answersSchema = z.record(z.string().max(200), answerSchema);
export type Answers = z.infer<typeof answersSchema>;

export const findingSchema = z.object({
	/** Stable: the same question about the same cells has the same id each time. */
	id: z.string().max(200),
	level: z.enum(FINDING_LEVELS),
	/** Rule of the reader, B1 to B40; A7 for signs of faults in the lab. */
	rule: z.string().regex(/^(?:B\d{1,2}|A7)$/),
	sheet: z.string(),
	/** Addresses such as A14; for rows or columns the first cell of each. At most 200, `count` has them all. */
	cells: z.array(z.string()),
	count: z.int().nonnegative(),
	found: z.string(),
	expected: z.string(),
	message: z.string(),
	options: z.array(findingOptionSchema),
	answer: answerSchema.optional(),
	/** A Stop or an Ask without a complete answer. */
	open: z.boolean(),
	/** What is wrong with the answer given, where it cannot be taken. */
	problem: z.string().optional()
});
export type Finding = z.infer<typeof findingSchema>;

export const cellCorrectionSchema = correctionSchema;
export type CellCorrection = z.infer<typeof correctionSchema>;

/* ------------------------------------------------------------------ the proposal */

export const columnProposalSchema = z.object({
	column: z.int(),
	letter: z.string(),
	/** Full header, super-header joined: "Concentration (mmol/L) / A". */
	header: z.string(),
	/** Group of columns under one super-header. */
	group: z.string().optional(),
	role: z.enum(COLUMN_ROLES),
	unit: z.string().nullable(),
	/** Species whose id or name the header is, exactly or but for case. */
	species: z.string().nullable(),
	/** Numbers read in the column, for the preview. */
	numbers: z.int(),
	hidden: z.boolean().optional()
});
export type ColumnProposal = z.infer<typeof columnProposalSchema>;

/** A series that is a row of the sheet. */
export const rowProposalSchema = columnProposalSchema
	.omit({ column: true, letter: true })
	.extend({ row: z.int() });
export type RowProposal = z.infer<typeof rowProposalSchema>;

export const suggestionSchema = z.object({
	value: z.number(),
	unit: z.string(),
	/** Where it was read: "sheet name '50 °C'", "B2". */
	source: z.string()
});
export type Suggestion = z.infer<typeof suggestionSchema>;

export const tableProposalSchema = z.object({
	id: z.string(),
	/** Text above the table, or the sheet's name. */
	title: z.string(),
	sheet: z.string(),
	range: z.string(),
	block: blockSchema,
	headerRows: z.array(z.int()),
	/** Rows shown greyed: footers and limits under the table, with why. */
	footerRows: z.array(z.object({ row: z.int(), why: z.string() })),
	columns: z.array(columnProposalSchema),
	/** Where times run across: the series, which are rows; `columns` are then the plain columns of the sheet. */
	rows: z.array(rowProposalSchema).optional(),
	/** Long layout: the peak names found, with how many values each has. */
	peaks: z.array(z.object({ peak: z.string(), values: z.int(), species: z.string().nullable() })).optional(),
	mapping: mappingSchema,
	savedMapping: z.string().optional(),
	suggested: z.object({
		temperature: suggestionSchema.optional(),
		initial: z.record(z.string(), suggestionSchema).optional(),
		loq: suggestionSchema.optional(),
		lod: suggestionSchema.optional()
	}),
	findings: z.array(findingSchema)
});
export type TableProposal = z.infer<typeof tableProposalSchema>;

export const proposalSchema = z.object({
	tables: z.array(tableProposalSchema),
	/** Notes on the whole workbook, and a Stop when there is no table at all. */
	findings: z.array(findingSchema),
	sheets: z.array(
		z.object({
			name: z.string(),
			state: z.enum(['visible', 'hidden', 'very hidden']),
			tables: z.array(z.string()),
			what: z.string()
		})
	)
});
export type Proposal = z.infer<typeof proposalSchema>;

/* ------------------------------------------------------------------ settlement */

/** Something the run still needs that no cell can give. */
export const needSchema = z.object({
	field: z.enum(['temperature', 'initial', 'molarMass', 'species']),
	species: z.string().optional(),
	message: z.string()
});
export type Need = z.infer<typeof needSchema>;

export const massBalanceSchema = z.object({
	unit: z.string(),
	/** % of the charge (or of the first row) at each time. */
	rows: z.array(z.object({ row: z.int(), time: z.number(), percent: z.number(), complete: z.boolean() })),
	mean: z.number(),
	/** % per time unit, with its 95 % interval; null below three rows. */
	slope: z.object({ value: z.number(), low: z.number(), high: z.number(), unit: z.string() }).nullable(),
	message: z.string()
});
export type MassBalance = z.infer<typeof massBalanceSchema>;

export const settlementSchema = z.object({
	findings: z.array(findingSchema),
	open: z.int(),
	needs: z.array(needSchema),
	/** Mapping with the answers worked in. */
	mapping: mappingSchema,
	/** Values as they stand, also while findings are open; null in a cell that is not settled. */
	preview: z.array(
		z.object({
			row: z.int(),
			time: z.number().nullable(),
			sampleId: z.string().optional(),
			values: z.record(z.string(), assayValue)
		})
	),
	conversions: z.array(z.string()),
	massBalance: massBalanceSchema.nullable(),
	/** "Half of A is gone in 52 min - as seen in the lab?" */
	plausibility: z.array(z.string()),
	/** Where a new run begins, when the person said so: propose it as a table of its own. */
	rest: blockSchema.nullable(),
	run: runContent.nullable()
});
export type Settlement = z.infer<typeof settlementSchema>;
