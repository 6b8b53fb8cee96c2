import type { QueryInterface } from 'sequelize';

/** Append-only tables by their key: an INSERT OR REPLACE would take a row away without asking the triggers for DELETE. */
const BY_KEY: [table: string, key: string][] = [
	['audit_events', 'seq'],
	...[
		'signatures',
		'fits',
		'fit_runs',
		'windows',
		'exports',
		'scheme_versions',
		'run_revisions',
		'review_comments',
		'caution_acknowledgements',
		'recipe_versions',
		'sheets'
	].map((table): [string, string] => [table, 'id'])
];

export async function up(q: QueryInterface): Promise<void> {
	for (const [table, key] of BY_KEY)
		await q.sequelize.query(
			`CREATE TRIGGER ${table}_refuse_replace BEFORE INSERT ON ${table}
			 WHEN EXISTS (SELECT 1 FROM ${table} WHERE ${key} = NEW.${key})
			 BEGIN SELECT RAISE(ABORT, '${table} is append-only'); END`
		);
	await q.sequelize.query(
		`CREATE TRIGGER recipe_versions_refuse_reopening BEFORE UPDATE OF state ON recipe_versions
		 WHEN NEW.state = 'draft' AND OLD.state <> 'draft'
		 BEGIN SELECT RAISE(ABORT, 'a version never becomes a draft again'); END`
	);
}
