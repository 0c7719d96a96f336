export function Component() {
  return null;
}
