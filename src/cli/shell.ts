import { InputFault } from "../stack/fault.ts";

/** What the process says to the shell when it ends. */
export const ExitCode = {
  done: 0,
  /** a fault of the program */
  programFault: 1,
  /** the input or the call is wrong */
  wrongInput: 2,
  /** done, but the verdict is unsound */
  unsound: 3,
} as const;
export type ExitCode = (typeof ExitCode)[keyof typeof ExitCode];

/** Prints the one message a failed run ends with, and gives the exit code. */
export function reportFault(error: unknown): ExitCode {
  if (process.env.GLEAMWALK_DEBUG && error instanceof Error) process.stderr.write(`${error.stack}\n`);
  if (error instanceof InputFault) {
    complain(error.message);
    return ExitCode.wrongInput;
  }
  const message = error instanceof Error ? error.message : String(error);
  complain(`a fault of the program, not of your input: ${message} (GLEAMWALK_DEBUG=1 shows where)`);
  return ExitCode.programFault;
}

/** One line on stderr, whatever line breaks a library put into its message. */
export function complain(message: string): void {
  process.stderr.write(`gleamwalk: ${message.trim().replace(/\s*\n\s*/g, " ")}\n`);
}

/** `gleamwalk … | head` closes the pipe early; that is no fault. */
export function keepQuietAboutClosedPipes(): void {
  for (const stream of [process.stdout, process.stderr])
    stream.on("error", (error: NodeJS.ErrnoException) => {
      if (error.code !== "EPIPE") throw error;
    });
}

/** Colour only for a person: on a terminal, and not where NO_COLOR (no-color.org) is set to anything. */
export function wantsColour(stream: NodeJS.WriteStream): boolean {
  return stream.isTTY === true && !process.env.NO_COLOR && process.env.TERM !== "dumb";
}

/** Columns to write for: the terminal's, at most 100; 80 where the output is no terminal. */
export function textWidth(stream: NodeJS.WriteStream): number {
  return stream.isTTY === true ? Math.max(40, Math.min(stream.columns || 80, 100)) : 80;
}
