/**
 * How long it takes from the request to call a fit off until the record says so, on a fit far larger than a usual one.
 *
 *     node tests/load/cancel.mjs --url http://localhost:4300 --study <id> --token <token> [--rows 20000] [--rounds 5]
 *
 * Needs a running service, a study to put invented runs into, and a token with the scopes read, write and fit. Prints one line a
 * round: the answer to DELETE, and the event "cancelled" on the fit's stream, in milliseconds after the request was sent.
 */
const given = Object.fromEntries(
	process.argv
		.slice(2)
		.join(' ')
		.split('--')
		.filter(Boolean)
		.map((part) => part.trim().split(/\s+/))
);
const { url, study, token, rows = '20000', rounds = '5' } = given;
if (!url || !study || !token) {
	console.error('Give --url, --study and --token; see the head of this file.');
	process.exit(1);
}
const SPECIES = 'ABCDEFGH'.split('');

async function call(method, path, body, headers = {}) {
	const json = body !== undefined && !(body instanceof FormData);
	const response = await fetch(`${url}/api/v1${path}`, {
		method,
		headers: {
			authorization: `Bearer ${token}`,
			...(json ? { 'content-type': 'application/json' } : {}),
			...headers
		},
		body: json ? JSON.stringify(body) : body
	});
	const answer = await response.json();
	if (!response.ok) throw new Error(`${method} ${path}: ${answer.detail}`);
	return answer;
}

/** A reversible chain with a constant for each direction: fourteen constants to find. */
const scheme = {
	name: `Long chain ${Date.now()}`,
	species: SPECIES.map((id) => ({ id })),
	steps: SPECIES.slice(1).map((product, i) => ({
		id: `s${i + 1}`,
		reactant: SPECIES[i],
		products: [{ species: product, coefficient: 1 }],
		forward: { kRef: { value: 0.5 + 0.1 * i, unit: '1/h' } },
		reverse: { kRef: { value: 0.1 + 0.05 * i, unit: '1/h' } }
	})),
	referenceTemperature: { value: 50, unit: 'degC' }
};

/** Values without a meaning: only their number counts here. */
function sheet(seed) {
	const head = ['Time (h)', ...SPECIES.map((id) => `${id} (mol/L)`)].join(',');
	const lines = Array.from({ length: Number(rows) }, (_, i) => {
		const time = (i * 24) / Number(rows);
		const values = SPECIES.map((_id, k) =>
			i === 0
				? k === 0
					? 1
					: 0.001
				: Math.abs(
						(k === 0 ? Math.exp(-0.5 * time) : 0.1) + 0.01 * Math.sin(12.9 * i + 78.2 * k + seed)
					).toFixed(5)
		);
		return [time.toFixed(5), ...values].join(',');
	});
	return [head, ...lines].join('\n');
}

async function makeRun(seed) {
	const form = new FormData();
	form.set('file', new File([sheet(seed)], `long-${seed}-${Date.now()}.csv`, { type: 'text/csv' }));
	const { id } = await call('POST', `/studies/${study}/sheets`, form);
	const made = await call('POST', `/sheets/${id}/runs`, {
		tableKey: given.table ?? 't1',
		conditions: {
			temperature: { value: 50, unit: 'degC' },
			initial: { A: { value: 1, unit: 'mol/L' } }
		},
		answers: JSON.parse(given.answers ?? '{}')
	});
	return made.runId ?? made.id;
}

async function round(schemeId, runIds, seed) {
	const { id } = await call('POST', `/studies/${study}/fits`, {
		schemeId,
		runIds,
		options: { starts: 500, seed }
	});
	let cancelledAt = 0;
	const running = Promise.withResolvers();
	const ended = Promise.withResolvers();
	const stream = await fetch(`${url}/api/v1/fits/${id}/events`, {
		headers: { authorization: `Bearer ${token}` }
	});
	void (async () => {
		for await (const chunk of stream.body.pipeThrough(new TextDecoderStream())) {
			if (/event: progress/.test(chunk)) running.resolve();
			if (/event: cancelled/.test(chunk)) {
				cancelledAt = performance.now();
				ended.resolve();
			}
			if (/event: (done|failed)/.test(chunk)) ended.reject(new Error(`ended by itself: ${chunk}`));
		}
	})();
	await Promise.race([running.promise, new Promise((resolve) => setTimeout(resolve, 15_000)), ended.promise]);
	await new Promise((resolve) => setTimeout(resolve, 1000 + 700 * (seed % 4)));
	const asked = performance.now();
	await call('DELETE', `/fits/${id}`);
	const answered = performance.now() - asked;
	await ended.promise;
	console.log(`answer ${answered.toFixed(0)} ms, event ${(cancelledAt - asked).toFixed(0)} ms`);
}

if (!Promise.withResolvers)
	Promise.withResolvers = () => {
		const made = {};
		made.promise = new Promise((resolve, reject) => Object.assign(made, { resolve, reject }));
		return made;
	};
const { id: schemeId } = await call('POST', `/studies/${study}/schemes`, scheme);
const begun = Date.now() % 1e6;
const runIds = [await makeRun(begun), await makeRun(begun + 1)];
console.log(`${2 * Number(rows) * SPECIES.length} values, 14 constants, 500 starts`);
for (let i = 0; i < Number(rounds); i++) await round(schemeId, runIds, 1000 + i);
