/** Words that labs put in headers, footers and cells, in the languages met most. Nothing here changes a number. */

const any = (...words: string[]) => new RegExp(`^(?:${words.join('|')})$`, 'i');
const begins = (...words: string[]) => new RegExp(`^(?:${words.join('|')})(?![\\p{L}])`, 'iu');

/** Retention and acquisition times are not the time of the reaction. */
const RETENTION =
	/\b(ret(ention|\.)?[ .-]*(time|zeit)?|rrt|rt|t ?r|tr|retentionszeit|temps de r[ée]tention|tiempo de retenci[oó]n|inj(ection|\.)? ?time|acq(uisition|\.)? ?time|run ?time)\b/i;
const TIME =
	/(?:^|[\s/_([-])(time ?point|timepoint|time|zeit|reaktionszeit|reaction ?time|probenzeit|probezeit|elapsed|temps|tiempo|tempo|tijd|tid|dur[ée]e|dauer|duration|durata|age)(?:$|[\s/_)\].,:-])/i;
const CLOCK =
	/(uhrzeit|clock|time of day|heure|\bhora\b|timestamp|time ?stamp|zeitstempel|date|datum|fecha|\bdata\/ora\b)/i;
const TEMPERATURE =
	/^(t|ti|tr|tint|t ?int(ern(al)?)?\.?|t ?r|it|temp\.?|temperature|temperatur|temp[ée]rature|temperatura|innentemp(eratur|\.)?|internal temp(erature|\.)?|pot temp(erature)?|reactor temp(erature)?|batch temp(erature)?|jacket|tj|t ?jacket|bath( temp(erature)?)?|bad(temp(eratur)?)?)$/i;
const SAMPLE =
	/^((sample|probe|proben|[ée]chantillon|muestra|campione|vial|lims|ipc)([ _.-]?(id|name|no\.?|nr\.?|number|nummer|code|#))?|probennummer|proben-?nr\.?|sample-?id)$/i;
const COUNTER = /^(n|count|anzahl|no\.?|nr\.?|#|n°|entry|line|row|index|lfd\.? ?nr\.?|pos\.?|seq\.?|id)$/i;
const INJECTION =
	/^(inj\.?|injection|einspritzung|injektion|replicate|rep\.?|repeat|wdh\.?|wiederholung|inj\.? ?(no\.?|nr\.?|#))$/i;
const COMMENT =
	/^(comments?|remarks?|notes?|bemerkung(en)?|kommentar(e)?|anmerkung(en)?|remarques?|observaciones|analyst|operator|initials|checked( by)?|analytiker|k[üu]rzel|method|methode|instrument|batch|charge(n-?nr)?|lot|file|data ?file)$/i;
const TOTAL =
	/^(sum|total|totals|summe|gesamt|σ|Σ|somme|suma|mass ?balance|balance|bilanz|massenbilanz|total area|sum of areas|total peaks?)\b/i;
const STANDARD =
	/^(is|istd|i\.s\.|int(ernal|\.)? ?(std|standard)\.?|interner standard|[ée]talon interne|is area)$/i;
const PEAK =
	/^(peak|peaks|peak ?name|name|compound|compound ?name|component|analyte|substance|substanz|species|komponente|verbindung|pic|compos[ée]|pico|compuesto|signal name)$/i;
const PEAK_VALUE =
	/^(area|areas|peak ?area|area ?%|%? ?area|amount|conc\.?|concentration|konz\.?|konzentration|fl[äa]che|value|result|ergebnis|wert|aire|[áa]rea|response|content|gehalt)\b/i;

export const isRetention = (text: string): boolean => RETENTION.test(text);
export const isTimeWord = (text: string): boolean =>
	!RETENTION.test(text) && (TIME.test(` ${text} `) || /^t$/.test(text.trim()));
export const isClockWord = (text: string): boolean => CLOCK.test(text);
export const isTemperatureWord = (text: string): boolean =>
	TEMPERATURE.test(text.trim()) && text.trim() !== 't';
export const isSampleWord = (text: string): boolean => SAMPLE.test(text.trim());
export const isCounterWord = (text: string): boolean => COUNTER.test(text.trim());
export const isInjectionWord = (text: string): boolean => INJECTION.test(text.trim());
export const isCommentWord = (text: string): boolean => COMMENT.test(text.trim());
export const isTotalWord = (text: string): boolean => TOTAL.test(text.trim());
export const isStandardWord = (text: string): boolean => STANDARD.test(text.trim());
const UNIT = /^(units?|einheit(en)?|unit[ée]s?|unidad(es)?|unit[àa])$/i;
export const isUnitWord = (text: string): boolean => UNIT.test(text.trim());
export const isPeakWord = (text: string): boolean => PEAK.test(text.trim());
export const isPeakValueWord = (text: string): boolean => PEAK_VALUE.test(text.trim());

/** Names of samples that are none of the reaction: blanks, standards, controls. */
const CONTROL =
	/^(blanks?|blk|blanc|blindwert|diluent|solvent blank|wash|std\.?|standards?|ref(erence|\.)? ?(std|standard)\.?|sst|system suitability|qc|control|kontroll?e?|kontrollprobe|cal(ibration|ibrant|\.)?|kalibrier\p{L}*|[ée]talon|bracketing)(?: ?(std|standard|sample|probe)\.?)?[\s_.#-]*[a-z]?\d{0,3}(?:\s*\(.*\))?$/iu;
export const isControlName = (text: string): boolean => text.length <= 60 && CONTROL.test(text.trim());

/** First cell of a row under (or over) the data that is not a sample. */
const FOOTER = begins(
	'mean',
	'means',
	'average',
	'avg\\.?',
	'mittel',
	'mittelwert',
	'mw',
	'moyenne',
	'media',
	'promedio',
	'x̄',
	'sd',
	's\\.d\\.',
	'std\\.?(?![\\s_.#-]*\\d)',
	'stdev',
	'st\\.? ?dev\\.?',
	'standard deviation',
	'stabw',
	'standardabweichung',
	'[ée]cart[- ]type',
	'desv',
	'rsd',
	'%? ?rsd',
	'cv',
	'vk',
	'variance',
	'varianz',
	'sum',
	'summe',
	'total',
	'somme',
	'min\\.?imum',
	'max\\.?imum',
	'minimum',
	'maximum',
	'n ?=',
	'count',
	'anzahl',
	'checked',
	'gepr[üu]ft',
	'reviewed',
	'analyst',
	'date',
	'datum',
	'initials',
	'signature',
	'unterschrift',
	'note',
	'notes',
	'remark',
	'remarks',
	'bemerkung',
	'comment',
	'comments',
	'kommentar',
	'legend',
	'legende',
	'source',
	'quelle',
	'slope',
	'intercept',
	'r²',
	'r\\^2'
);
/** Means and spreads of other rows, by their name alone. */
const STATISTIC =
	/^(means?|average|avg\.?|mittel(wert)?|mw|moyenne|media|promedio|x̄|median|s\.?d\.?|std\.? ?dev\.?|stdev|st\.? ?dev\.?|standard deviation|stabw\.?|standardabweichung|[ée]cart[- ]type|%? ?rsd ?%?|rel\.? ?sd|cv ?%?|vk ?%?|variance|varianz)\.?(?: ?[([].*[)\]])?$/i;
export const isStatisticName = (text: string): boolean => STATISTIC.test(text.trim());

/** What stands for the scatter of values in a header: "A SD", "B %RSD", "±". */
const SPREAD =
	/(?:^|[\s_(])(?:s\.?d\.?|std\.? ?dev\.?|stdev|st\.? ?dev\.?|stabw\.?|standardabweichung|standard (?:deviation|error)|s\.?e\.?m?\.?|%? ?rsd ?%?|rel\.? ?sd|cv ?%?|vk ?%?|±|\+\/-|range|spannweite|error)\)?$/i;
export const isSpreadHeader = (text: string): boolean => SPREAD.test(text.trim());

export const isFooterWord = (text: string): boolean => FOOTER.test(text.trim());

const LIMIT = begins(
	'loq',
	'lloq',
	'lod',
	'limit of quantitation',
	'limit of quantification',
	'limit of detection',
	'bestimmungsgrenze',
	'bg',
	'nachweisgrenze',
	'ng',
	'lq',
	'ld',
	'reporting limit'
);
export const isLimitWord = (text: string): boolean => LIMIT.test(text.trim());
/** Which limit the words name. */
export const limitKind = (text: string): 'loq' | 'lod' =>
	/^(lod|limit of detection|nachweisgrenze|ng|ld)(?![\p{L}])/iu.test(text.trim()) ? 'lod' : 'loq';

/** Texts in the place of a value, by what they may mean. */
const BELOW_WORD = any(
	'<\\s*(loq|lloq|bg|lq|ql|rl)',
	'blq',
	'bloq',
	'bql',
	'n\\.? ?q\\.?',
	'below loq',
	'< ?bestimmungsgrenze',
	'not quantifiable',
	'nicht quantifizierbar',
	'loq'
);
const BELOW_DETECTION = any('<\\s*(lod|ng|ld|dl|mdl)', 'bld', 'bdl', 'below lod', '< ?nachweisgrenze');
const NOT = any(
	'n\\.? ?d\\.?',
	'n/d',
	'not ?det(ected|ermined|\\.)?',
	'nicht nachgewiesen',
	'nicht nachweisbar',
	'nicht bestimmt',
	'n\\.? ?n\\.?',
	'n\\.? ?b\\.?',
	'non d[ée]tect[ée]',
	'no detectado',
	'nondetect'
);
const TRACE = any('tr\\.?', 'traces?', 'spur(en)?', 'trazas', '\\+');
const OVER = any(
	'saturated',
	'sat\\.?',
	'oor',
	'out of range',
	'over ?range',
	'overflow',
	'ovr',
	'>\\s*(uloq|max)',
	'ges[äa]ttigt',
	'above range',
	'\\*{2,}'
);
const MISSING = any(
	'-+',
	'–',
	'—',
	'/',
	'\\.+',
	'n/a',
	'n\\.a\\.',
	'na',
	'#n/a n/a',
	'none',
	'nil',
	'missing',
	'fehlt',
	'lost',
	'failed',
	'nan',
	'null',
	'x',
	'\\?+',
	'not sampled',
	'no sample',
	'not measured',
	'n\\.?m\\.?',
	'see (note|remark|comment)s?',
	's\\. ?u\\.',
	'siehe (bemerkung|anmerkung|unten)',
	'\\*'
);

export type ValueWord = 'below loq' | 'below lod' | 'not' | 'trace' | 'over' | 'missing';

/** What a word in the place of a value may mean; null when it is not one of these. */
export function valueWord(text: string): ValueWord | null {
	const plain = text.trim().replace(/[\s\u00a0]+/g, ' ');
	if (plain.length > 40) return null;
	if (BELOW_WORD.test(plain)) return 'below loq';
	if (BELOW_DETECTION.test(plain)) return 'below lod';
	if (NOT.test(plain)) return 'not';
	if (TRACE.test(plain)) return 'trace';
	if (OVER.test(plain)) return 'over';
	if (MISSING.test(plain)) return 'missing';
	return null;
}

/** Words around a species' name in a header that do not name it. */
export const QUANTITY_WORDS =
	/\b(conc(entration|\.)?|konz(entration|\.)?|area|areas|fl[äa]che|aire|[áa]rea|amount|assay|content|gehalt|peak|signal|found|measured|result|lc|hplc|uplc|gc|uv|mean|avg|average|mittelwert|mittel|moyenne|promedio)\b/gi;
