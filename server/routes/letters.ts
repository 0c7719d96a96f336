import { z } from "zod";
import { IdParams } from "../../shared/schemas/common";
import {
  LetterFilter,
  LetterPage,
  LetterView,
  OpenedLetter,
  PaperAcknowledgement,
} from "../../shared/schemas/letter";
import { acknowledgeByLink, acknowledgeOnPaper, openLetter } from "../commands/acknowledge-letter";
import { endpoint } from "../lib/endpoint";
import { authorize } from "../lib/policy";
import { letterPolicy, may } from "../policies";
import { findLetter, letterView, listLetters } from "../queries/letters";

const LinkParams = z.object({ secret: z.string().regex(/^[\w-]{20,80}$/) });

/** Results told to the workers they were measured on, and that they were read. */
export function defineLetterRoutes(): void {
  endpoint.get(
    "/letters",
    {
      summary: "Letters with results of measurements, to workers at or over an action value",
      may: may.readLetters,
      query: LetterFilter,
      reply: LetterPage,
    },
    ({ actor, query }) => listLetters(actor, query),
  );

  endpoint.get(
    "/letters/:id",
    {
      summary: "A letter as it was written, and how far it is",
      may: may.readLetters,
      params: IdParams,
      reply: LetterView,
      reads: { kind: "letter", worker: (_, { worker }) => worker.id },
    },
    ({ actor, params }) => letterView(actor, params.id),
  );

  endpoint.post(
    "/letters/:id/acknowledgement",
    {
      summary: "Record that a letter was signed on paper",
      may: may.officer,
      params: IdParams,
      body: PaperAcknowledgement,
      reply: LetterView,
    },
    async ({ actor, params, body }) => {
      const letter = await findLetter(actor, params.id);
      authorize(letterPolicy, actor, "acknowledge", letter);
      await acknowledgeOnPaper(actor, letter, body.signedOn);
      return letterView(actor, letter.id);
    },
  );

  endpoint.get(
    "/acknowledgements/:secret",
    {
      summary: "The letter that a link belongs to; opening it acknowledges nothing",
      may: "public",
      params: LinkParams,
      reply: OpenedLetter,
    },
    ({ params, request }) => openLetter(params.secret, request.session),
  );

  endpoint.post(
    "/acknowledgements/:secret",
    {
      summary: "Say that the letter was read; a link does it once",
      may: "public",
      params: LinkParams,
      storesNothing: true,
      reply: OpenedLetter,
    },
    ({ params, request }) => acknowledgeByLink(params.secret, request.session),
  );
}
