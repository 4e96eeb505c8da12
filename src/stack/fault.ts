/**
 * A fault in what the user gave: a file, a key, a frame or an option.
 *
 * Its message is one sentence for the person at the bench: which file, which key or frame, what is wrong, what
 * to do. The command line prints it alone and exits with 2; any other error is a fault of the program (exit 1).
 */
export class InputFault extends Error {
  override readonly name = "InputFault";
  /** The file the fault is in, where there is one. */
  readonly file: string | undefined;
  /** The acquisition key, option or frame ("sample.temperature", "--from", "frame 12"), where there is one. */
  readonly where: string | undefined;

  constructor(message: string, context: { file?: string; where?: string; cause?: unknown } = {}) {
    super(message, context.cause === undefined ? undefined : { cause: context.cause });
    this.file = context.file;
    this.where = context.where;
  }
}
