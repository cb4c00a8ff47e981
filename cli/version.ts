/** The version of the package, from the one place where it stands. */
import { createRequire } from 'node:module';

interface PackageFile {
  readonly version: string;
}

export function packageVersion(): string {
  // By the package's own name, so that the path is the same from sources and from the built files.
  return (createRequire(import.meta.url)('thickset/package.json') as PackageFile).version;
}
