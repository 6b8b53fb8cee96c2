/** Stops with a clear message on a Node.js that the service cannot run on. */
export function requireNode() {
	const [major, minor] = process.versions.node.split('.').map(Number);
	if (major > 20 || (major === 20 && minor >= 19)) return;
	fail(
		`Ratewright needs Node.js 20.19 or later; this is ${process.versions.node}.`,
		'Install a current Node.js 20 and try again.'
	);
}

/**
 * Ends the command with what was found and one way out, without a stack trace.
 * @param {string} found
 * @param {string} [wayOut]
 * @returns {never}
 */
export function fail(found, wayOut) {
	console.error(`\n${found}${wayOut ? `\n${wayOut}` : ''}\n`);
	process.exit(1);
}
