/** Something the person at the keyboard can act on: shown as one line, without a stack. */
export class Failure extends Error {
  name = "Failure";
}

/** Turns a file-system error into a line that says what to do; anything else passes unchanged. */
export function explainFileError(error, folder) {
  const code = error?.code;
  if (code === "ENOSPC" || code === "EDQUOT") return diskFull(folder);
  if (code === "EACCES" || code === "EPERM" || code === "EROFS") return notWritable(folder);
  if (code === "ENOTDIR" || code === "EEXIST") {
    return new Failure(`${folder} is not a folder: set DINWARD_DATA to one that can be written.`);
  }
  return error;
}

export function diskFull(folder) {
  return new Failure(`The disk that holds ${folder} is full: free some space and start again.`);
}

export function notWritable(folder) {
  return new Failure(
    `The data folder ${folder} cannot be written: change its permissions or set DINWARD_DATA.`,
  );
}

/** Runs a script's main function: a Failure is one line and exit code 1. */
export async function runMain(main) {
  try {
    await main();
  } catch (error) {
    console.error(error instanceof Failure ? `dinward: ${error.message}` : error);
    process.exit(1);
  }
}
