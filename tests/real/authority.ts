import { execFileSync } from 'node:child_process';
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';

/** PEM files of a certificate authority, made by openssl, and of what it signed. */
export interface Authority {
  readonly ca: string;
  /** Makes a key and a certificate for a name; `hosts` as in subjectAltName. @returns the paths of both */
  issue(name: string, hosts?: string): { readonly cert: string; readonly key: string };
}

const openssl = (...args: string[]): void => void execFileSync('openssl', args, { stdio: ['ignore', 'ignore', 'ignore'] });

/** An authority of its own in a folder. @param name of the authority and its files */
export function authorityIn(folder: string, name: string): Authority {
  const path = (file: string): string => join(folder, `${name}-${file}`);
  const ca = path('ca.pem');
  const caKey = path('ca-key.pem');
  openssl('req', '-x509', '-newkey', 'ec', '-pkeyopt', 'ec_paramgen_curve:P-256', '-nodes', '-keyout', caKey, '-out', ca, '-days', '2', '-subj', `/CN=${name} authority`);
  return {
    ca,
    issue(of, hosts) {
      const [cert, key, request, extensions] = ['pem', 'key.pem', 'csr', 'ext'].map((end) => path(`${of}.${end}`)) as [string, string, string, string];
      openssl('req', '-newkey', 'ec', '-pkeyopt', 'ec_paramgen_curve:P-256', '-nodes', '-keyout', key, '-out', request, '-subj', `/CN=${of}`);
      writeFileSync(extensions, hosts === undefined ? 'extendedKeyUsage=clientAuth\n' : `subjectAltName=${hosts}\n`);
      openssl('x509', '-req', '-in', request, '-CA', ca, '-CAkey', caKey, '-CAcreateserial', '-days', '1', '-extfile', extensions, '-out', cert);
      return { cert, key };
    },
  };
}
