/** Small workbooks written part by part, for tests: what a spreadsheet program would write, and what none would. */
import { strToU8, zipSync, type Zippable } from 'fflate';
import { address } from '$lib/assay/grid';

export type TestCell =
	| number
	| string
	| boolean
	| null
	| {
			v?: number | string;
			/** Formula; without `v` it has no stored result. */
			f?: string;
			/** Number format code, colour, strike-through. */
			format?: string;
			fill?: boolean;
			strike?: boolean;
			error?: string;
			/** Texts of a rich inline string. */
			rich?: string[];
			iso?: string;
	  };

export interface TestSheet {
	name?: string;
	rows: TestCell[][];
	merges?: string[];
	hiddenRows?: number[];
	hiddenColumns?: number[];
	state?: 'hidden' | 'veryHidden';
	filter?: string;
}

const escape = (text: string) => text.replace(/&/g, '&amp;').replace(/</g, '&lt;').replace(/"/g, '&quot;');

class Styles {
	private readonly keys: string[] = ['General|0|0'];
	index(format = 'General', fill = false, strike = false): number {
		const key = `${format}|${fill ? 1 : 0}|${strike ? 1 : 0}`;
		if (!this.keys.includes(key)) this.keys.push(key);
		return this.keys.indexOf(key);
	}

	xml(): string {
		const parts = this.keys.map((key) => key.split('|'));
		const formats = parts
			.map(([code], i) => `<numFmt numFmtId="${200 + i}" formatCode="${escape(code)}"/>`)
			.join('');
		const xfs = parts
			.map(
				([, fill, strike], i) =>
					`<xf numFmtId="${200 + i}" fontId="${strike}" fillId="${fill === '1' ? 2 : 0}"/>`
			)
			.join('');
		return `<styleSheet xmlns="${MAIN}"><numFmts>${formats}</numFmts><fonts><font><sz val="11"/></font><font><strike/></font></fonts><fills><fill><patternFill patternType="none"/></fill><fill><patternFill patternType="gray125"/></fill><fill><patternFill patternType="solid"><fgColor rgb="FFFFFF00"/></patternFill></fill></fills><cellXfs>${xfs}</cellXfs></styleSheet>`;
	}
}

const MAIN = 'http://schemas.openxmlformats.org/spreadsheetml/2006/main';
const OFFICE = 'http://schemas.openxmlformats.org/officeDocument/2006/relationships';
const PACKAGE = 'http://schemas.openxmlformats.org/package/2006';

function cellXml(cell: TestCell, row: number, column: number, styles: Styles): string {
	if (cell === null) return '';
	const at = `r="${address(row, column)}"`;
	if (typeof cell === 'number') return `<c ${at}><v>${cell}</v></c>`;
	if (typeof cell === 'boolean') return `<c ${at} t="b"><v>${cell ? 1 : 0}</v></c>`;
	if (typeof cell === 'string')
		return `<c ${at} t="inlineStr"><is><t xml:space="preserve">${escape(cell)}</t></is></c>`;
	const s = `s="${styles.index(cell.format, cell.fill, cell.strike)}"`;
	const f = cell.f ? `<f>${escape(cell.f)}</f>` : '';
	if (cell.error) return `<c ${at} ${s} t="e">${f}<v>${cell.error}</v></c>`;
	if (cell.iso) return `<c ${at} ${s} t="d"><v>${cell.iso}</v></c>`;
	if (cell.rich)
		return `<c ${at} ${s} t="inlineStr"><is>${cell.rich.map((t) => `<r><t>${escape(t)}</t></r>`).join('')}</is></c>`;
	if (typeof cell.v === 'string') return `<c ${at} ${s} t="str">${f}<v>${escape(cell.v)}</v></c>`;
	return `<c ${at} ${s}>${f}${cell.v === undefined ? '' : `<v>${cell.v}</v>`}</c>`;
}

function sheetXml(sheet: TestSheet, styles: Styles): string {
	const rows = sheet.rows
		.map((cells, i) => {
			const hidden = sheet.hiddenRows?.includes(i + 1) ? ' hidden="1"' : '';
			return `<row r="${i + 1}"${hidden}>${cells.map((c, j) => cellXml(c, i + 1, j + 1, styles)).join('')}</row>`;
		})
		.join('');
	const cols = sheet.hiddenColumns?.map((c) => `<col min="${c}" max="${c}" hidden="1"/>`).join('') ?? '';
	const merges = sheet.merges?.map((ref) => `<mergeCell ref="${ref}"/>`).join('') ?? '';
	return `<worksheet xmlns="${MAIN}">${cols ? `<cols>${cols}</cols>` : ''}<sheetData>${rows}</sheetData>${
		sheet.filter ? `<autoFilter ref="${sheet.filter}"><filterColumn colId="0"/></autoFilter>` : ''
	}${merges ? `<mergeCells>${merges}</mergeCells>` : ''}</worksheet>`;
}

export interface TestOptions {
	date1904?: boolean;
	/** Parts put in place of, or beside, those written. */
	parts?: Record<string, string | Uint8Array>;
}

/** The parts of a workbook, before they are packed. */
export function workbookParts(
	sheets: TestSheet[],
	options: TestOptions = {}
): Record<string, string | Uint8Array> {
	const styles = new Styles();
	const bodies = sheets.map((s) => sheetXml(s, styles));
	const list = sheets
		.map(
			(s, i) =>
				`<sheet name="${escape(s.name ?? `Sheet${i + 1}`)}" sheetId="${i + 1}"${s.state ? ` state="${s.state}"` : ''} r:id="rId${i + 1}"/>`
		)
		.join('');
	const relation = (id: string, type: string, target: string) =>
		`<Relationship Id="${id}" Type="${OFFICE}/${type}" Target="${target}"/>`;
	return {
		'[Content_Types].xml': `<Types xmlns="${PACKAGE}/content-types"><Default Extension="xml" ContentType="application/xml"/></Types>`,
		'_rels/.rels': `<Relationships xmlns="${PACKAGE}/relationships">${relation('rId1', 'officeDocument', 'xl/workbook.xml')}</Relationships>`,
		'xl/workbook.xml': `<workbook xmlns="${MAIN}" xmlns:r="${OFFICE}"><workbookPr${options.date1904 ? ' date1904="1"' : ''}/><sheets>${list}</sheets></workbook>`,
		'xl/_rels/workbook.xml.rels': `<Relationships xmlns="${PACKAGE}/relationships">${sheets.map((_, i) => relation(`rId${i + 1}`, 'worksheet', `worksheets/sheet${i + 1}.xml`)).join('')}${relation('rIdS', 'styles', 'styles.xml')}</Relationships>`,
		'xl/styles.xml': styles.xml(),
		...Object.fromEntries(bodies.map((body, i) => [`xl/worksheets/sheet${i + 1}.xml`, body])),
		...options.parts
	};
}

export function pack(parts: Record<string, string | Uint8Array>): Uint8Array {
	const files: Zippable = {};
	for (const [name, body] of Object.entries(parts))
		files[name] = typeof body === 'string' ? strToU8(body) : body;
	return zipSync(files, { level: 6 });
}

export const workbookBytes = (sheets: TestSheet[], options: TestOptions = {}): Uint8Array =>
	pack(workbookParts(sheets, options));

/** One sheet of rows. */
export const oneSheet = (
	rows: TestCell[][],
	more: Omit<TestSheet, 'rows'> = {},
	options: TestOptions = {}
): Uint8Array => workbookBytes([{ name: 'Data', rows, ...more }], options);
