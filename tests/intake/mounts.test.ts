import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { isNetworkFileSystem, mountOf } from '../../src/intake/mounts.ts'

// The first line is the worked example of proc_pid_mountinfo(5), from memory; the others follow its format.
const table = `36 35 98:0 /mnt1 /mnt2 rw,noatime master:1 - ext3 /dev/root rw,errors=continue
22 1 8:1 / / rw,relatime shared:1 - ext4 /dev/sda1 rw
40 22 0:44 / /srv/drop rw shared:7 master:3 - nfs4 files.lab.example:/drop rw,vers=4.2
41 40 0:45 / /srv/drop/uv\\0402 rw - cifs //files.lab.example/uv2 rw
42 22 0:46 / /srv/twice rw - tmpfs none rw
43 22 0:47 / /srv/twice rw - fuse.sshfs bench@lab.example:/ rw
`

describe('the file system that a folder lies on', () => {
  it.each([
    ['/mnt2/uv1', '/mnt2', 'ext3'],
    ['/mnt22', '/', 'ext4'],
    ['/srv/drop', '/srv/drop', 'nfs4'],
    ['/srv/drop/uv1/a', '/srv/drop', 'nfs4'],
    ['/srv/drop/uv 2/a', '/srv/drop/uv 2', 'cifs'],
    ['/srv/twice', '/srv/twice', 'fuse.sshfs'],
  ])('%s lies on %s, %s', (path, mountPoint, type) => {
    expect(mountOf(table, path)).toEqual({ mountPoint, type })
  })

  it('where nothing is known nothing is claimed', () => {
    expect(mountOf('', '/srv')).toBeNull()
  })

  it('shares are polled, disks of this machine are watched', () => {
    expect(['nfs', 'nfs4', 'cifs', 'smb3', '9p', 'fuse.sshfs'].every(isNetworkFileSystem)).toBe(true)
    expect(['ext4', 'xfs', 'btrfs', 'tmpfs', 'overlay', 'fuseblk', 'vfat'].some(isNetworkFileSystem)).toBe(false)
  })

  it.skipIf(process.platform !== 'linux')('the kernel’s own table is understood', () => {
    expect(mountOf(readFileSync('/proc/self/mountinfo', 'utf8'), '/proc')).toEqual({
      mountPoint: '/proc',
      type: 'proc',
    })
  })
})
