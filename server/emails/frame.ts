import type { Locale } from "../../shared/i18n";

export interface Mail {
  subject: string;
  text: string;
  html: string;
}

const escapeHtml = (text: string) => text.replace(/[&<>"']/g, (mark) => `&#${mark.charCodeAt(0)};`);

const footLine = (line: string | { address: string; words: string }) =>
  typeof line === "string"
    ? escapeHtml(line)
    : `<a href="${escapeHtml(line.address)}" style="color:#135A50">${escapeHtml(line.words)}</a>`;

/** A mail's HTML from the paragraphs of its text: the page's own paper and ink, and one link. */
export function mailHtml(
  locale: Locale,
  subject: string,
  paragraphs: readonly string[],
  link: { address: string; words: string },
  foot: readonly (string | { address: string; words: string })[],
): string {
  return `<!doctype html><html lang="${locale}"><head><meta charset="utf-8"><title>${escapeHtml(subject)}</title></head>
<body style="margin:0;background:#F5F0E4;color:#211D17;font:17px/1.45 'Atkinson Hyperlegible Next',Verdana,sans-serif">
<div style="max-width:560px;margin:0 auto;padding:20px;border-top:3px solid #211D17">
${paragraphs.map((paragraph) => `<p>${escapeHtml(paragraph).replaceAll("\n", "<br>")}</p>`).join("\n")}
<p><a href="${escapeHtml(link.address)}" style="color:#135A50">${escapeHtml(link.words)}</a></p>
<p style="border-top:1px solid #211D17;padding-top:8px;font-size:14px;color:#5B5346">${foot.map(footLine).join("<br>")}</p>
</div></body></html>`;
}
