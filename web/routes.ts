/** What the address names. */
export type Route =
  | { view: 'campaigns' }
  | { view: 'campaign'; id: string }
  | { view: 'sample'; id: string; sample: string }
  | { view: 'instrument'; id: string; instrument: string }
  | { view: 'jobs'; id: string }
  | { view: 'none' };

function decode(part: string): string | undefined {
  try {
    return decodeURIComponent(part);
  } catch {
    return undefined;
  }
}

/** Reads a path such as `/campaigns/:id/samples/:sample`. */
export function parseRoute(path: string): Route {
  const parts = path.split('/').filter(Boolean).map(decode);
  const [head, id, room, name] = parts;
  if (parts.includes(undefined)) return { view: 'none' };
  if (parts.length === 0) return { view: 'campaigns' };
  if (head !== 'campaigns' || id === undefined) return { view: 'none' };
  if (parts.length === 2) return { view: 'campaign', id };
  if (room === 'jobs' && parts.length === 3) return { view: 'jobs', id };
  if (room === 'samples' && name !== undefined && parts.length === 4) return { view: 'sample', id, sample: name };
  if (room === 'instruments' && name !== undefined && parts.length === 4)
    return { view: 'instrument', id, instrument: name };
  return { view: 'none' };
}

const part = encodeURIComponent;

export const campaignPath = (id: string): string => `/campaigns/${part(id)}`;
export const samplePath = (id: string, sample: string): string => `${campaignPath(id)}/samples/${part(sample)}`;
export const instrumentPath = (id: string, instrument: string): string =>
  `${campaignPath(id)}/instruments/${part(instrument)}`;
export const jobsPath = (id: string): string => `${campaignPath(id)}/jobs`;
