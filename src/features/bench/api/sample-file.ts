import { RequestProblem } from '../../../lib/errors/request-problem';

/** The bytes of a sample acquisition, as if a person had opened the file. */
export async function fetchSample(name: string): Promise<File> {
  const path = `/api/samples/${encodeURIComponent(name)}`;
  let response: Response;
  try {
    response = await fetch(path, { credentials: 'same-origin' });
    if (response.ok) return new File([await response.blob()], name);
  } catch (error) {
    throw new RequestProblem(
      'unreachable',
      `The sample ${name} did not arrive: the server does not answer. Check that it is running, then try again.`,
      { place: path, cause: error },
    );
  }
  throw new RequestProblem(
    'unreadable',
    `The server did not hand over the sample ${name} (status ${response.status}). Make the samples again with npm run samples, then reload.`,
    { place: path, status: response.status },
  );
}
