/** Files dropped where there is no bench, on their way to it. Only the page holds them. */
let waiting: readonly File[] = [];

export function handOverFiles(files: readonly File[]): void {
  waiting = files;
}

/** Gives them once. */
export function takeFiles(): readonly File[] {
  const files = waiting;
  waiting = [];
  return files;
}
