/** Sheets of a campaign folder, recognised by name at its root. */
const SHEET = /^(scans|instruments|samples|peaks|viscosity|goal)\.csv$/i;

export interface PlannedFile<Chosen> {
  chosen: Chosen;
  /** Path in the campaign */
  path: string;
  /** Set for a file that is not sent, with the reason shown. */
  leftOut?: string;
}

/**
 * The folder that stands around the whole campaign and is no part of its paths: one folder alone was given, and it holds
 * sheets at its root or only files laid out as SAMPLE/INSTRUMENT/file below it. Otherwise undefined.
 */
export function outerFolder(paths: readonly string[]): string | undefined {
  const visible = paths.filter((path) => !isHidden(path));
  if (visible.length === 0) return undefined;
  const [outer] = visible[0].split('/');
  if (!visible.every((path) => path.startsWith(`${outer}/`))) return undefined;
  const inner = visible.map((path) => path.slice(outer.length + 1));
  const holdsSheet = inner.some((path) => SHEET.test(path));
  const isLaidOut = inner.every((path) => path.split('/').length >= 3);
  return holdsSheet || isLaidOut ? outer : undefined;
}

const isHidden = (path: string): boolean =>
  path.split('/').some((part) => part.startsWith('.') || part === 'Thumbs.db' || part === '__MACOSX');

/** Paths to send under, sheets first so that scans find their rows at once; hidden files are left out, with a reason. */
export function planUpload<Chosen extends { path: string }>(chosen: readonly Chosen[]): PlannedFile<Chosen>[] {
  const outer = outerFolder(chosen.map((c) => c.path));
  const planned = chosen.map((c): PlannedFile<Chosen> => {
    const path = (outer === undefined ? c.path : c.path.slice(outer.length + 1)).normalize('NFC');
    return isHidden(path) ? { chosen: c, path, leftOut: 'hidden file of the operating system' } : { chosen: c, path };
  });
  const order = (p: PlannedFile<Chosen>): number => (SHEET.test(p.path) ? 0 : 1);
  return planned.sort((a, b) => order(a) - order(b) || (a.path < b.path ? -1 : 1));
}
