/**
 * A zip as untrusted bytes: the directory is read and checked first (names, sizes, overlaps), then single members are
 * unfolded piece by piece, so that memory stays bounded by one piece and never by what a member claims or turns out to hold.
 * Layout of the records: PKWARE APPNOTE.TXT 6.3.10, sections 4.3.7, 4.3.12, 4.3.14 to 4.3.16 and 4.5.3.
 */
import { crc32 } from 'node:zlib';
import { Inflate } from 'fflate';
import { megabytes, type ReadingLimits } from './limits';
import { damaged, SheetRefusal } from './refusal';

export interface ZipMember {
	name: string;
	method: number;
	packed: number;
	unfolded: number;
	crc: number;
	/** Where its data begin, behind the local header. */
	start: number;
}

const END = 0x06054b50;
const END_64_LOCATOR = 0x07064b50;
const END_64 = 0x06064b50;
const CENTRAL = 0x02014b50;
const LOCAL = 0x04034b50;
/** Piece fed to the inflater: unfolds to at most about a thousand times as much. */
const PIECE = 4096;

interface Directory {
	count: number;
	offset: number;
}

/** Reads and checks the directory. @throws SheetRefusal damaged, path-traversal, bomb, too-large, encrypted */
export function readDirectory(bytes: Uint8Array, limits: ReadingLimits): Map<string, ZipMember> {
	const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
	const { count, offset } = findDirectory(view);
	if (count > limits.members)
		throw new SheetRefusal(
			'too-large',
			`The file holds ${count} parts; at most ${limits.members} are read. Keep only the sheet with the assay values and upload that.`
		);
	const members = new Map<string, ZipMember>();
	let at = offset;
	for (let i = 0; i < count; i++) {
		if (at + 46 > bytes.length || view.getUint32(at, true) !== CENTRAL)
			throw damaged('its directory is broken');
		const nameLength = view.getUint16(at + 28, true);
		const extraLength = view.getUint16(at + 30, true);
		const next = at + 46 + nameLength + extraLength + view.getUint16(at + 32, true);
		if (next > bytes.length) throw damaged('its directory is cut off');
		const name = memberName(bytes.subarray(at + 46, at + 46 + nameLength));
		if (view.getUint16(at + 8, true) & 1) throw encryptedZip();
		if (members.has(name)) throw damaged(`the part "${name}" is there twice`);
		members.set(name, readMember(view, at, name, nameLength, extraLength));
		at = next;
	}
	checkOverlaps([...members.values()], offset);
	checkSizes([...members.values()], limits);
	return members;
}

const encryptedZip = () =>
	new SheetRefusal(
		'encrypted',
		'The file is encrypted, so that its cells cannot be read. Remove the password in your spreadsheet program and upload it again.'
	);

function findDirectory(view: DataView): Directory {
	const last = view.byteLength - 22;
	for (let at = last; at >= 0 && at >= last - 65_535; at--) {
		if (view.getUint32(at, true) !== END) continue;
		const count = view.getUint16(at + 10, true);
		const offset = view.getUint32(at + 16, true);
		if (count === 0xffff || offset === 0xffffffff) return findDirectory64(view, at);
		return { count, offset };
	}
	throw damaged('its end is missing, so it was cut off or is not a zip');
}

function findDirectory64(view: DataView, end: number): Directory {
	const locator = end - 20;
	if (locator < 0 || view.getUint32(locator, true) !== END_64_LOCATOR)
		throw damaged('its end record is broken');
	const at = Number(view.getBigUint64(locator + 8, true));
	if (at + 56 > view.byteLength || view.getUint32(at, true) !== END_64)
		throw damaged('its end record is broken');
	return {
		count: Number(view.getBigUint64(at + 32, true)),
		offset: Number(view.getBigUint64(at + 48, true))
	};
}

function readMember(
	view: DataView,
	at: number,
	name: string,
	nameLength: number,
	extraLength: number
): ZipMember {
	const sizes = [view.getUint32(at + 24, true), view.getUint32(at + 20, true), view.getUint32(at + 42, true)];
	const [unfolded, packed, offset] = wideSizes(view, at + 46 + nameLength, extraLength, sizes);
	if (offset + 30 > view.byteLength || view.getUint32(offset, true) !== LOCAL)
		throw damaged(`the part "${name}" is not where the directory says`);
	const start = offset + 30 + view.getUint16(offset + 26, true) + view.getUint16(offset + 28, true);
	if (start + packed > view.byteLength) throw damaged(`the part "${name}" is cut off`);
	return {
		name,
		method: view.getUint16(at + 10, true),
		packed,
		unfolded,
		crc: view.getUint32(at + 16, true),
		start
	};
}

/** Sizes of 0xFFFFFFFF stand in the extra field 1 (zip64), in this order. */
function wideSizes(view: DataView, at: number, length: number, sizes: number[]): number[] {
	if (!sizes.includes(0xffffffff)) return sizes;
	for (let p = at; p + 4 <= at + length; p += 4 + view.getUint16(p + 2, true)) {
		if (view.getUint16(p, true) !== 1) continue;
		const end = Math.min(p + 4 + view.getUint16(p + 2, true), at + length);
		let q = p + 4;
		return sizes.map((size) => {
			if (size !== 0xffffffff) return size;
			if (q + 8 > end) throw damaged('its sizes cannot be read');
			q += 8;
			return Number(view.getBigUint64(q - 8, true));
		});
	}
	return sizes;
}

/** Names stay inside the package: no absolute path, drive, backslash, parent step or control character. */
function memberName(raw: Uint8Array): string {
	const name = new TextDecoder('utf-8').decode(raw);
	const steps = name.split('/');
	const controls = [...name].some((c) => c.charCodeAt(0) < 32);
	if (
		name.startsWith('/') ||
		name.includes('\\') ||
		/^[A-Za-z]:/.test(name) ||
		steps.includes('..') ||
		controls
	)
		throw new SheetRefusal(
			'path-traversal',
			'The file names a part outside itself, which no spreadsheet program writes. It was not opened. Ask its sender for a fresh copy.'
		);
	return name;
}

function checkOverlaps(members: ZipMember[], directory: number): void {
	const sorted = [...members].sort((a, b) => a.start - b.start);
	for (let i = 0; i < sorted.length; i++) {
		const end = sorted[i].start + sorted[i].packed;
		const limit = i + 1 < sorted.length ? sorted[i + 1].start : directory;
		if (end > limit && sorted[i].packed > 0) throw bomb('its parts lie over each other');
	}
}

function checkSizes(members: ZipMember[], limits: ReadingLimits): void {
	const total = members.reduce((sum, m) => sum + m.unfolded, 0);
	if (total > limits.declaredBytes) throw bomb(`it would unfold to ${megabytes(total)}`);
}

export const bomb = (what: string): SheetRefusal =>
	new SheetRefusal(
		'bomb',
		`The file is packed in a way that would flood the service (${what}). It was not opened. Save the sheet again as .xlsx with only the cells you need.`
	);

/** Counts what all members read so far unfolded to. */
export class UnfoldBudget {
	private used = 0;
	constructor(private readonly limits: ReadingLimits) {}

	/** Before anything is unfolded: what the member says of itself. */
	expect(bytes: number): void {
		if (this.used + bytes > this.limits.unfoldedBytes)
			throw bomb(`it would unfold to more than ${megabytes(this.limits.unfoldedBytes)}`);
	}

	spend(bytes: number): void {
		this.used += bytes;
		if (this.used > this.limits.unfoldedBytes)
			throw bomb(`it unfolds to more than ${megabytes(this.limits.unfoldedBytes)}`);
	}
}

/**
 * Unfolds one member into `sink`, piece by piece. Stops at once when it gives more than it declared.
 * @throws SheetRefusal bomb, damaged; whatever `sink` throws
 */
export function unfold(
	bytes: Uint8Array,
	member: ZipMember,
	budget: UnfoldBudget,
	sink: (piece: Uint8Array) => void
): void {
	const data = bytes.subarray(member.start, member.start + member.packed);
	budget.expect(member.unfolded);
	let given = 0;
	let crc = 0;
	const take = (piece: Uint8Array) => {
		given += piece.length;
		if (given > member.unfolded) throw bomb(`the part "${member.name}" is larger than it says`);
		budget.spend(piece.length);
		crc = crc32(piece, crc);
		sink(piece);
	};
	if (member.method === 0) for (let p = 0; p < data.length; p += 65_536) take(data.subarray(p, p + 65_536));
	else if (member.method === 8) inflate(data, member.name, take);
	else throw damaged(`the part "${member.name}" is packed by a method that is not read here`);
	if (given !== member.unfolded || crc !== member.crc)
		throw damaged(`the part "${member.name}" does not match its checksum`);
}

function inflate(data: Uint8Array, name: string, take: (piece: Uint8Array) => void): void {
	const inflater = new Inflate((piece) => {
		if (piece.length > 0) take(piece);
	});
	try {
		for (let p = 0; p < data.length; p += PIECE)
			inflater.push(data.subarray(p, p + PIECE), p + PIECE >= data.length);
	} catch (error) {
		if (error instanceof SheetRefusal) throw error;
		throw damaged(`the part "${name}" cannot be unfolded`);
	}
}
