/**
 * XML as untrusted bytes: a stream of elements, never a tree, with bounded memory whatever the bytes say. No construct is ever
 * held whole but a tag (at most 64 KB): text is handed on in pieces, comments are passed over. Document type declarations (and
 * with them every entity but the five of XML) are refused. Grammar: Extensible Markup Language 1.0 (5th ed.), W3C 2008.
 */
import { damaged, SheetRefusal } from './refusal';

export type Attributes = Readonly<Record<string, string>>;

export interface XmlEvents {
	/** Names come without their namespace prefix; attributes with it. */
	open?: (name: string, attributes: Attributes) => void;
	/** A piece of text; one text may come in several. */
	text?: (text: string) => void;
	close?: (name: string) => void;
}

const DEPTH = 64;
const TAG = 65_536;
const MOST_ATTRIBUTES = 200;
const NONE: Attributes = Object.freeze(Object.create(null) as Record<string, string>);
// eslint-disable-next-line no-control-regex -- the characters that XML 1.0 forbids
const FORBIDDEN = /[\u0000-\u0008\u000b\u000c\u000e-\u001f\ufffe\uffff]/;

type Mode = 'content' | 'comment' | 'cdata' | 'instruction';
const ENDS: Record<Exclude<Mode, 'content'>, string> = { comment: '-->', cdata: ']]>', instruction: '?>' };

export class XmlReader {
	private decoder: TextDecoder | null = null;
	private buffer = '';
	private mode: Mode = 'content';
	private readonly stack: string[] = [];
	private rootSeen = false;
	private elements = 0;

	constructor(
		private readonly part: string,
		private readonly events: XmlEvents,
		private readonly mostElements: number
	) {}

	write(piece: Uint8Array): void {
		this.decoder ??= new TextDecoder(encodingOf(piece));
		this.take(this.decoder.decode(piece, { stream: true }));
	}

	/** After the last piece. */
	finish(): void {
		if (!this.decoder) throw damaged(`the part "${this.part}" is empty`);
		this.take(this.decoder.decode());
		if (this.buffer.trim() !== '' || this.mode !== 'content' || this.stack.length > 0 || !this.rootSeen)
			throw this.broken();
	}

	private broken(): SheetRefusal {
		return damaged(`the part "${this.part}" is not well-formed XML`);
	}

	private take(text: string): void {
		if (FORBIDDEN.test(text)) throw this.broken();
		this.buffer += text;
		let at = 0;
		for (;;) {
			const next = this.mode === 'content' ? this.content(at) : this.passOver(at);
			if (next < 0) break;
			at = next;
		}
		this.buffer = this.buffer.slice(this.kept ?? at);
		this.kept = null;
		if (this.buffer.length > TAG) throw this.broken();
	}

	/** Where the unread rest begins, when a step stopped for want of more text. */
	private kept: number | null = null;

	private wait(at: number): number {
		this.kept = at;
		return -1;
	}

	/** Inside a comment, CDATA section or instruction: to its end, holding nothing but what may be a part of the end mark. */
	private passOver(at: number): number {
		const mode = this.mode as Exclude<Mode, 'content'>;
		const end = this.buffer.indexOf(ENDS[mode], at);
		const until = end < 0 ? Math.max(at, this.buffer.length - 2) : end;
		if (mode === 'cdata' && until > at) this.emit(this.buffer.slice(at, until));
		if (end < 0) return this.wait(until);
		this.mode = 'content';
		return end + ENDS[mode].length;
	}

	private content(at: number): number {
		const { buffer } = this;
		const tag = buffer.indexOf('<', at);
		if (tag < 0) {
			// An entity may be cut in two: hold it back.
			const amp = buffer.lastIndexOf('&');
			const until = amp >= at && buffer.length - amp < 12 && !buffer.includes(';', amp) ? amp : buffer.length;
			if (until > at) this.plainText(buffer.slice(at, until));
			return this.wait(until);
		}
		if (tag > at) this.plainText(buffer.slice(at, tag));
		switch (buffer[tag + 1]) {
			case undefined:
				return this.wait(tag);
			case '!':
				return this.declaration(tag);
			case '?':
				this.mode = 'instruction';
				return tag + 2;
			case '/':
				return this.closeTag(tag);
			default:
				return this.openTag(tag);
		}
	}

	private declaration(at: number): number {
		const head = this.buffer.slice(at, at + 9);
		if (head.startsWith('<!--')) this.mode = 'comment';
		else if (head === '<![CDATA[' && this.stack.length > 0) this.mode = 'cdata';
		else if (head.length < 9 && ('<!--'.startsWith(head) || '<![CDATA['.startsWith(head)))
			return this.wait(at);
		else if (/^<!DOC/i.test(head))
			throw new SheetRefusal(
				'entity-declaration',
				'The workbook declares XML entities, which no spreadsheet program writes. It was not opened. Ask its sender for a fresh copy.'
			);
		else if (head.length < 5) return this.wait(at);
		else throw this.broken();
		return at + (this.mode === 'comment' ? 4 : 9);
	}

	private closeTag(at: number): number {
		const end = this.buffer.indexOf('>', at);
		if (end < 0) return this.wait(at);
		const name = this.buffer.slice(at + 2, end).trimEnd();
		if (this.stack.pop() !== name) throw this.broken();
		this.events.close?.(localName(name));
		return end + 1;
	}

	private openTag(at: number): number {
		const tag = this.readTag(at);
		if (!tag) return this.wait(at);
		if (this.stack.length === 0 && this.rootSeen) throw this.broken();
		this.rootSeen = true;
		if (this.stack.length >= DEPTH) throw damaged(`the part "${this.part}" is nested too deeply`);
		if (++this.elements > this.mostElements)
			throw new SheetRefusal(
				'too-large',
				`The part "${this.part}" holds more than is read at once (${this.mostElements.toLocaleString('en')} elements). Keep only the sheet with the assay values and upload that.`
			);
		const name = localName(tag.name);
		this.events.open?.(name, tag.attributes);
		if (tag.empty) this.events.close?.(name);
		else this.stack.push(tag.name);
		return tag.end;
	}

	/** Null while the tag is not there whole. */
	private readTag(at: number): { name: string; attributes: Attributes; empty: boolean; end: number } | null {
		const { buffer } = this;
		let i = at + 1;
		while (i < buffer.length && !endsName(buffer.charCodeAt(i))) i++;
		const name = buffer.slice(at + 1, i);
		let attributes: Record<string, string> | null = null;
		let count = 0;
		for (;;) {
			i = skipSpace(buffer, i);
			if (i >= buffer.length) return null;
			const c = buffer[i];
			if (c === '>' || c === '/') {
				if (c === '/' && i + 1 >= buffer.length) return null;
				if ((c === '/' && buffer[i + 1] !== '>') || !isName(name)) throw this.broken();
				return { name, attributes: attributes ?? NONE, empty: c === '/', end: i + (c === '/' ? 2 : 1) };
			}
			const start = i;
			while (i < buffer.length && !endsName(buffer.charCodeAt(i))) i++;
			const key = buffer.slice(start, i);
			i = skipSpace(buffer, i);
			if (i >= buffer.length) return null;
			if (buffer[i] !== '=' || !isName(key)) throw this.broken();
			i = skipSpace(buffer, i + 1);
			if (i >= buffer.length) return null;
			const quote = buffer[i];
			if (quote !== '"' && quote !== "'") throw this.broken();
			const end = buffer.indexOf(quote, i + 1);
			if (end < 0) return null;
			attributes ??= Object.create(null) as Record<string, string>;
			if (key in attributes || ++count > MOST_ATTRIBUTES) throw this.broken();
			attributes[key] = this.decode(buffer.slice(i + 1, end), true);
			i = end + 1;
		}
	}

	private plainText(text: string): void {
		if (this.stack.length === 0) {
			if (text.trim() !== '') throw this.broken();
			return;
		}
		this.emit(this.decode(text, false));
	}

	private emit(text: string): void {
		this.events.text?.(text);
	}

	private decode(text: string, attribute: boolean): string {
		if (attribute && text.includes('<')) throw this.broken();
		if (!text.includes('&')) return text;
		return text.replace(
			/&(?:#x([0-9a-fA-F]{1,6})|#(\d{1,7})|([a-z]{2,4}));|&/g,
			(_, hex: string, decimal: string, word: string) => {
				const named = word && Object.hasOwn(WORDS, word) ? WORDS[word] : null;
				if (named) return named;
				const code = hex ? parseInt(hex, 16) : decimal ? Number(decimal) : NaN;
				if (!(code > 0 && code <= 0x10ffff) || (code >= 0xd800 && code <= 0xdfff)) throw this.broken();
				const character = String.fromCodePoint(code);
				if (FORBIDDEN.test(character)) throw this.broken();
				return character;
			}
		);
	}
}

const WORDS: Record<string, string> = { amp: '&', lt: '<', gt: '>', quot: '"', apos: "'" };

const isSpace = (code: number) => code === 32 || code === 9 || code === 10 || code === 13;
/** Space, "/", ">" or "=". */
const endsName = (code: number) => isSpace(code) || code === 47 || code === 62 || code === 61;
const isName = (name: string) => /^[A-Za-z_\u0080-\uffff][\w:.\-\u0080-\uffff]*$/.test(name);

function skipSpace(text: string, at: number): number {
	let i = at;
	while (i < text.length && isSpace(text.charCodeAt(i))) i++;
	return i;
}

function localName(name: string): string {
	const colon = name.indexOf(':');
	return colon < 0 ? name : name.slice(colon + 1);
}

/** Office parts are UTF-8 or UTF-16 (ECMA-376-2); a byte-order mark or a NUL beside "<" tells. */
function encodingOf(piece: Uint8Array): string {
	if (piece[0] === 0xff && piece[1] === 0xfe) return 'utf-16le';
	if (piece[0] === 0xfe && piece[1] === 0xff) return 'utf-16be';
	if (piece[0] === 0x3c && piece[1] === 0) return 'utf-16le';
	if (piece[0] === 0 && piece[1] === 0x3c) return 'utf-16be';
	return 'utf-8';
}
