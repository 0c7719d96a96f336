const formPost = (address: string, fields: Record<string, string>): RequestInit => ({
  method: "POST",
  headers: {
    "Content-Type": "application/x-www-form-urlencoded",
    Origin: new URL(address).origin,
  },
  body: new URLSearchParams(fields).toString(),
});

/** A person's browser reduced to requests, cookies and redirects: enough to sign in for real. */
export class Visitor {
  private readonly cookies = new Map<string, Map<string, string>>();

  /** One request with this visitor's cookies; redirects are answered, not followed. */
  async request(address: string, init: RequestInit = {}): Promise<Response> {
    const url = new URL(address);
    const jar = this.cookies.get(url.hostname);
    const headers = new Headers(init.headers);
    if (jar && jar.size > 0) {
      headers.set("Cookie", [...jar].map(([name, value]) => `${name}=${value}`).join("; "));
    }
    const response = await fetch(url, { ...init, headers, redirect: "manual" });
    this.keepCookies(url.hostname, response);
    return response;
  }

  /** Follows redirects as a browser does and says where it ended. */
  async open(address: string, init: RequestInit = {}): Promise<{ url: URL; response: Response }> {
    let url = new URL(address);
    let response = await this.request(url.href, init);
    for (let hop = 0; hop < 12; hop += 1) {
      const location = response.headers.get("Location");
      if (response.status < 300 || response.status >= 400 || !location) return { url, response };
      url = new URL(location, url);
      response = await this.request(url.href);
    }
    throw new Error(`too many redirects, last to ${url.href}`);
  }

  /** Signs in at the provider and gives the address that leads back, not yet asked for. */
  async upTo(path: string, signInAddress: string, sub: string): Promise<string> {
    const page = await this.open(signInAddress);
    const form = `${page.url.href}/sign-in`;
    let url = new URL(form);
    let response = await this.request(form, formPost(form, { sub }));
    for (let hop = 0; hop < 12; hop += 1) {
      url = new URL(response.headers.get("Location") ?? "", url);
      if (url.pathname === path) return url.href;
      response = await this.request(url.href);
    }
    throw new Error(`never came to ${path}, last to ${url.href}`);
  }

  /** Posts a form as a page on that address would. */
  submit(address: string, fields: Record<string, string>) {
    return this.open(address, formPost(address, fields));
  }

  /** Chooses a person on the local provider's page, which `signInAddress` leads to. */
  async signIn(signInAddress: string, sub: string) {
    const page = await this.open(signInAddress);
    if (!page.url.pathname.startsWith("/interaction/")) {
      throw new Error(`expected the provider's page but came to ${page.url.href}`);
    }
    return this.submit(`${page.url.href}/sign-in`, { sub });
  }

  cookie(hostname: string, name: string): string | undefined {
    return this.cookies.get(hostname)?.get(name);
  }

  private keepCookies(hostname: string, response: Response) {
    const jar = this.cookies.get(hostname) ?? new Map<string, string>();
    for (const line of response.headers.getSetCookie()) {
      const [pair = "", ...attributes] = line.split(";");
      const name = pair.slice(0, pair.indexOf("=")).trim();
      const value = pair.slice(pair.indexOf("=") + 1).trim();
      const isExpired = attributes.some((attribute) => {
        const [key = "", text = ""] = attribute.trim().split("=");
        if (key.toLowerCase() === "max-age") return Number(text) <= 0;
        return key.toLowerCase() === "expires" && Date.parse(text) <= Date.now();
      });
      if (isExpired || value === "") jar.delete(name);
      else jar.set(name, value);
    }
    this.cookies.set(hostname, jar);
  }
}
