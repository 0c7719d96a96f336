/** The page's head line and nothing that would jump; what follows brings its own frame. */
export function Loading() {
  return <div className="page" aria-busy="true" />;
}
