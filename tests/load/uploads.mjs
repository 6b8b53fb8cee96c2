/**
 * Fifty uploads at once to a service that is running on this machine: every one is answered, the service answers its health
 * check meanwhile, and its memory stays bounded.
 *
 *   RATEWRIGHT_TOKEN=<token with read,write> node tests/load/uploads.mjs --url http://localhost:4300 --study <id> [--count 50] [--pid <pid>]
 *
 * The workbooks are made here: plain ones, large ones, the same bytes twice, and files that must be refused. Only loopback
 * addresses are taken, and at most 100 uploads. Exit 1 when a bound does not hold.
 */
import { readFileSync } from 'node:fs';
import { parseArgs } from 'node:util';
import XlsxPopulate from 'xlsx-populate';

const HEALTH_MS = 300;
const MEMORY_MB = 1024;
const EVERY_MS = 100;
const LONGEST_MS = 120_000;

const { values } = parseArgs({
	options: {
		url: { type: 'string', default: 'http://localhost:4300' },
		study: { type: 'string' },
		count: { type: 'string', default: '50' },
		pid: { type: 'string' }
	}
});
const base = new URL(values.url);
const count = Math.min(100, Math.max(1, Number(values.count)));
const token = process.env.RATEWRIGHT_TOKEN;
if (!['localhost', '127.0.0.1', '[::1]'].includes(base.hostname))
	stop('Only a service on this machine is put under load.');
if (!values.study || !token) stop('Name the study with --study and give a token in RATEWRIGHT_TOKEN.');

/** @param {string} message */
function stop(message) {
	console.error(message);
	process.exit(2);
}

async function workbook(rows, seed) {
	const book = await XlsxPopulate.fromBlankAsync();
	const lines = [['time (h)', 'A (mol/L)', 'B (mol/L)']];
	for (let i = 0; i < rows; i++)
		lines.push([i / 10, 0.5 * Math.exp(-i / 40) + seed * 1e-6, 0.5 - 0.5 * Math.exp(-i / 40)]);
	book.sheet(0).cell('A1').value(lines);
	return Buffer.from(await book.outputAsync());
}

/** The files of a busy morning: most are plain, some large, some hostile, some sent twice. */
async function files() {
	const same = await workbook(40, 0);
	const large = await workbook(2000, 1);
	const made = [];
	for (let i = 0; i < count; i++) {
		const kind = ['plain', 'same', 'large', 'broken', 'plain'][i % 5];
		const bytes =
			kind === 'same'
				? same
				: kind === 'large'
					? i === 2
						? large
						: await workbook(2000, i)
					: kind === 'broken'
						? same.subarray(0, 900 + i)
						: await workbook(30 + i, i + 1);
		made.push({ name: `${kind} ${i}.xlsx`, kind, bytes });
	}
	return made;
}

async function send(file) {
	const form = new FormData();
	form.set('file', new Blob([file.bytes]), file.name);
	const started = performance.now();
	const response = await fetch(new URL(`/api/v1/studies/${values.study}/sheets`, base), {
		method: 'POST',
		body: form,
		headers: { authorization: `Bearer ${token}` },
		signal: AbortSignal.timeout(LONGEST_MS)
	});
	await response.text();
	return { kind: file.kind, status: response.status, ms: performance.now() - started };
}

/** Resident memory of the service, where its process was named (Linux). */
function memoryMb() {
	if (!values.pid) return null;
	const found = /VmRSS:\s+(\d+)/.exec(readFileSync(`/proc/${Number(values.pid)}/status`, 'utf8'));
	return found ? Number(found[1]) / 1024 : null;
}

/** Asks after the health every tenth of a second until told to end. */
function watch() {
	const seen = { waits: [], failed: 0, memory: memoryMb() ?? 0 };
	let going = true;
	const done = (async () => {
		while (going) {
			const started = performance.now();
			const response = await fetch(new URL('/healthz', base)).catch(() => null);
			seen.waits.push(performance.now() - started);
			if (!response?.ok) seen.failed++;
			await response?.text();
			seen.memory = Math.max(seen.memory, memoryMb() ?? 0);
			await new Promise((resolve) => setTimeout(resolve, EVERY_MS));
		}
	})();
	return {
		seen,
		end: () => {
			going = false;
			return done;
		}
	};
}

const round = (/** @type {number} */ n) => Math.round(n);
const quantile = (list, q) =>
	[...list].sort((a, b) => a - b)[Math.min(list.length - 1, Math.floor(q * list.length))];

const all = await files();
const before = memoryMb();
const health = watch();
const started = performance.now();
const answers = await Promise.all(
	all.map((file) => send(file).catch((error) => ({ kind: file.kind, status: 0, ms: 0, error })))
);
const took = performance.now() - started;
await health.end();

const expected = (kind) => (kind === 'broken' ? [415, 422] : [200, 201]);
const wrong = answers.filter((a) => !expected(a.kind).includes(a.status));
const { waits, failed, memory } = health.seen;
const report = {
	uploads: answers.length,
	seconds: round(took / 100) / 10,
	slowestMs: round(Math.max(...answers.map((a) => a.ms))),
	statuses: Object.fromEntries(
		[...new Set(answers.map((a) => `${a.kind} ${a.status}`))]
			.sort()
			.map((k) => [k, answers.filter((a) => `${a.kind} ${a.status}` === k).length])
	),
	healthChecks: waits.length,
	healthMs: {
		median: round(quantile(waits, 0.5)),
		p95: round(quantile(waits, 0.95)),
		slowest: round(Math.max(...waits))
	},
	memoryMb: values.pid ? { before: round(before ?? 0), highest: round(memory) } : 'not measured (no --pid)'
};
console.log(JSON.stringify(report, null, 2));
const faults = [
	...(wrong.length ? [`${wrong.length} uploads were not answered as expected`] : []),
	...(failed ? [`${failed} health checks failed`] : []),
	...(quantile(waits, 0.95) > HEALTH_MS ? [`health checks took more than ${HEALTH_MS} ms`] : []),
	...(memory > MEMORY_MB ? [`the service used more than ${MEMORY_MB} MB`] : [])
];
if (faults.length) {
	console.error(`Bounds that did not hold: ${faults.join('; ')}.`);
	process.exit(1);
}
