import { AppError } from '../errors';
import { settings } from '../settings';

export interface Upload {
	fileName: string;
	bytes: Uint8Array;
}

const problem = (message: string): AppError =>
	new AppError('invalid', message, { fields: [{ field: 'file', message }] });

function tooLarge(size: number): AppError {
	const limit = settings().UPLOAD_LIMIT_MB;
	const found = (size / 1_048_576).toFixed(1);
	return new AppError(
		'too-large',
		`The file has ${found} MB; at most ${limit} MB are taken. Keep only the sheet with the assay values.`
	);
}

/** The field `file` of a multipart body, within the size limit. */
export async function readUpload(request: Request): Promise<Upload> {
	const limit = settings().UPLOAD_LIMIT_MB * 1_048_576;
	const announced = Number(request.headers.get('content-length') ?? 0);
	// Room for the frame round the file.
	if (announced > limit + 1_048_576) throw tooLarge(announced);
	let form: FormData;
	try {
		form = await request.formData();
	} catch (caught) {
		if (!(caught instanceof TypeError)) throw caught;
		throw problem('A multipart/form-data body with a field "file" is expected.');
	}
	const file = form.get('file');
	if (!(file instanceof File)) throw problem('The field "file" with the sheet is missing.');
	if (file.size > limit) throw tooLarge(file.size);
	return { fileName: file.name || 'sheet', bytes: new Uint8Array(await file.arrayBuffer()) };
}
