import picomatch from 'picomatch'

/** Which names in a drop folder are an instrument's files. */
export interface FileNames {
  /** @param relativePath forward slashes */
  matches(relativePath: string): boolean
  /** Whether files may lie in subfolders. */
  readonly recursive: boolean
  /** Whether a folder of this name is worth entering. */
  enters(folderName: string): boolean
}

/** Endings under which programs, browsers and synchronisers keep a file until it is whole. Common practice. */
const TEMPORARY_ENDING = /(?:~|\.(?:tmp|temp|part|partial|filepart|crdownload|download|swp|swx|lock|lck))$/i
/** Prefixes of lock and owner files. Common practice. */
const TEMPORARY_START = /^(?:~\$|\.~|~|#)/

/** The same name without what makes it look temporary; null if nothing does. */
const withoutTemporaryMark = (relativePath: string): string | null => {
  const cut = relativePath.lastIndexOf('/') + 1
  const name = relativePath.slice(cut)
  if (TEMPORARY_ENDING.test(name)) return relativePath.slice(0, cut) + name.replace(TEMPORARY_ENDING, '.other')
  if (TEMPORARY_START.test(name)) return relativePath.slice(0, cut) + name.replace(TEMPORARY_START, 'other')
  return null
}

/**
 * A glob as a test for names: upper and lower case are one; dot files and temporary names only where the glob itself
 * asks for them. A glob asks for a temporary name if it matches it, and does not match the name without that mark.
 */
export const fileNames = (glob: string): FileNames => {
  const matchesGlob = picomatch(glob, { nocase: true })
  const namesDotFolders = /(?:^|[/{,(|])\./.test(glob)
  return {
    recursive: /\/|\*\*/.test(glob),
    enters: (folderName) => namesDotFolders || !folderName.startsWith('.'),
    matches: (relativePath) => {
      if (!matchesGlob(relativePath)) return false
      const plain = withoutTemporaryMark(relativePath)
      return plain === null || !matchesGlob(plain)
    },
  }
}
