/** Hands files to the browser, which asks where to put them and shows how far they are. */
export function download(addresses: readonly string[]): void {
  for (const address of addresses) {
    const link = document.createElement("a");
    link.href = address;
    link.download = "";
    document.body.append(link);
    link.click();
    link.remove();
  }
}
