import { execFileSync } from 'node:child_process'
import { readFileSync } from 'node:fs'
import { join } from 'node:path'

/** A self-signed certificate of localhost made by OpenSSL, as files in `folder`; null where there is no OpenSSL. */
export const makeCertificate = (folder: string) => {
  const [key, cert] = [join(folder, 'key.pem'), join(folder, 'cert.pem')]
  const about = ['-subj', '/CN=localhost', '-addext', 'subjectAltName=DNS:localhost,IP:127.0.0.1', '-days', '2']
  try {
    execFileSync('openssl', ['req', '-x509', '-newkey', 'rsa:2048', '-nodes', '-keyout', key, '-out', cert, ...about], {
      stdio: 'ignore',
    })
  } catch {
    return null
  }
  return { keyFile: key, certFile: cert, key: readFileSync(key), cert: readFileSync(cert) }
}
