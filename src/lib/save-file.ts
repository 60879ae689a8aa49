/** Offers a JSON file to keep. */
export function saveJson(value: unknown, name: string): void {
  const blob = new Blob([`${JSON.stringify(value, null, 2)}\n`], { type: 'application/json' });
  const address = URL.createObjectURL(blob);
  const link = document.createElement('a');
  link.href = address;
  link.download = name;
  link.click();
  // The download holds the blob from here on; one turn later is late enough in every browser.
  setTimeout(() => URL.revokeObjectURL(address), 0);
}

/** A name as every file system takes it: "Night run 14 / near" -> "night-run-14-near". */
export function fileNameOf(name: string, ending: string): string {
  const stem = name
    .toLowerCase()
    .replace(/[^a-z0-9]+/g, '-')
    .replace(/^-+|-+$/g, '')
    .slice(0, 80);
  return `${stem || 'gemel'}${ending}`;
}
