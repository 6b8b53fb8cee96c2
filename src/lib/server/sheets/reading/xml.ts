/**
 * XML as untrusted bytes: a stream of elements, never a tree. Document type declarations (and with them every entity but
 * the five of XML) are refused; depth and text are bounded.
 */
import { SaxesParser } from 'saxes';
import { damaged, SheetRefusal } from './refusal';

export interface XmlEvents {
	/** Names come without their namespace prefix. */
	open?: (name: string, attributes: Readonly<Record<string, string>>) => void;
	text?: (text: string) => void;
	close?: (name: string) => void;
}

const DEPTH = 64;

/** A parser fed with the bytes of one part. `finish` after the last piece. */
export function xmlReader(
	part: string,
	events: XmlEvents
): { write(piece: Uint8Array): void; finish(): void } {
	const parser = new SaxesParser({ xmlns: false, position: false });
	let decoder: TextDecoder | null = null;
	let depth = 0;
	parser.on('doctype', () => {
		throw new SheetRefusal(
			'entity-declaration',
			'The workbook declares XML entities, which no spreadsheet program writes. It was not opened. Ask its sender for a fresh copy.'
		);
	});
	parser.on('error', () => {
		throw damaged(`the part "${part}" is not well-formed XML`);
	});
	parser.on('opentag', (tag) => {
		if (++depth > DEPTH) throw damaged(`the part "${part}" is nested too deeply`);
		events.open?.(localName(tag.name), tag.attributes);
	});
	parser.on('closetag', (tag) => {
		depth--;
		events.close?.(localName(tag.name));
	});
	if (events.text) {
		const text = events.text;
		parser.on('text', text);
		parser.on('cdata', text);
	}
	return {
		write(piece) {
			decoder ??= new TextDecoder(encodingOf(piece));
			parser.write(decoder.decode(piece, { stream: true }));
		},
		finish() {
			if (!decoder) throw damaged(`the part "${part}" is empty`);
			parser.write(decoder.decode());
			parser.close();
		}
	};
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
