import { tryPackage } from '../package/install.ts';

/** The tarball of `npm pack` installed in an empty folder and used there. */
export const packageStudy = async (): Promise<string> => (await tryPackage()).map((line) => `- ${line}`).join('\n');
