import { BitassayError, BugError, EnvironmentError, InputError, LimitError } from './errors.ts';

/** What the caller named wrongly, by error code: what is wrong, what to do. */
const CALLER: Readonly<Record<string, readonly [string, string]>> = {
  ENOENT: ['there is no such file or folder', 'Check the spelling, and the folder you are in.'],
  ENOTDIR: ['a part of this path is a file, not a folder', 'Check the path.'],
  EACCES: ['no permission', 'Change its permissions, or choose another place.'],
  EPERM: ['the system does not allow it', 'Change its permissions, or choose another place.'],
  EISDIR: ['this is a folder, not a file', 'Name a file inside it.'],
  EEXIST: ['this exists already', 'Choose another name.'],
  ENOTEMPTY: ['this folder is not empty', 'Choose another name.'],
  ELOOP: ['its links lead in a circle', 'Name the file itself.'],
  ENAMETOOLONG: ['the name is too long for this file system', 'Choose a shorter one.'],
  ERR_INVALID_ARG_VALUE: ['this is no possible file name', 'Check the spelling.'],
};

/** Where the machine is in the way. */
const MACHINE: Readonly<Record<string, readonly [string, string]>> = {
  ENOSPC: ['the disk is full', 'Make room, or write to another disk.'],
  EDQUOT: ['your quota of the disk is used up', 'Make room, or write to another disk.'],
  EROFS: ['this file system can only be read', 'Write to another place.'],
  EFBIG: ['the file would be larger than this file system allows', 'Write to another disk.'],
  ENOMEM: ['there is no memory left', 'End other programs, or take a smaller part of the data.'],
  EMFILE: ['too many files are open', 'Raise the limit of open files (ulimit -n).'],
  ENFILE: ['too many files are open on this machine', 'End other programs.'],
  EBUSY: ['another program holds it', 'Try again when it is done.'],
  ETXTBSY: ['it is a program that is running', 'Try again when it has ended.'],
  EIO: ['the device failed', 'Check the disk or the network drive.'],
  ENXIO: ['no device answers', 'Check the device.'],
};

/**
 * A failure of the file system in words for the reader; an error of this program is handed back as it is.
 * @returns InputError when the caller named the wrong thing, EnvironmentError when the machine is in the way, LimitError when
 *   the file is too large to hold, BugError when it is no failure of the file system at all
 */
export function explainFileError(error: unknown, path: string): BitassayError {
  if (error instanceof BitassayError) return error;
  const { code, message } = error as NodeJS.ErrnoException;
  const where = { file: path };
  const caller = CALLER[code ?? ''];
  if (caller !== undefined) {
    return new InputError(`${path}: ${caller[0]}`, { ...where, advice: caller[1] }, error);
  }
  const machine = MACHINE[code ?? ''];
  if (machine !== undefined) {
    return new EnvironmentError(`${path}: ${machine[0]}`, { ...where, advice: machine[1] }, error);
  }
  if (code === 'ERR_FS_FILE_TOO_LARGE') {
    return new LimitError(
      `${path}: the file is too large to be held whole`,
      { ...where, expected: 'at most 2 GiB', advice: 'Take a smaller part of it.' },
      error,
    );
  }
  if (code !== undefined && /^E[A-Z0-9]+$/.test(code)) {
    return new EnvironmentError(`${path}: the file system says ${code}`, where, error);
  }
  return new BugError(`${path}: ${message ?? String(error)}`, where, error);
}
