import { z } from "zod";
import { Problem } from "../../shared/schemas/problem";
import { scopesOpening } from "../policies/token-scopes";
import { CSRF_COOKIE, CSRF_HEADER } from "./csrf";
import type { Route } from "./endpoint";
import type { UploadSpec } from "./upload";

const CSRF_DESCRIPTION = `The value of the cookie ${CSRF_COOKIE}, which comes with the sign-in. Every change by a signed-in person carries it; without it the answer is 403 with the code csrf.`;

type Json = Record<string, unknown>;

const toJson = (schema: z.ZodType, io: "input" | "output"): Json =>
  z.toJSONSchema(schema, {
    target: "draft-2020-12",
    io,
    unrepresentable: "any",
    reused: "inline",
  }) as Json;

function parameters(schema: z.ZodType | undefined, where: "path" | "query"): Json[] {
  if (!schema) return [];
  const { properties = {}, required = [] } = toJson(schema, "input") as {
    properties?: Record<string, Json>;
    required?: string[];
  };
  return Object.entries(properties).map(([name, property]) => ({
    name,
    in: where,
    required: where === "path" || required.includes(name),
    schema: property,
  }));
}

/** A form with one file or several: what is said of them in the body is the server's own. */
function formOf(schema: z.ZodType, { atMost }: UploadSpec): Json {
  const { properties, ...form } = toJson(schema, "input") as { properties: Record<string, Json> };
  const file = { type: "string", format: "binary" };
  const sent =
    atMost === undefined ? { file } : { files: { type: "array", items: file, maxItems: atMost } };
  return { ...form, properties: { ...properties, ...sent } };
}

/** OpenAPI 3.1 from the very schemas that parse requests and replies. */
export function buildOpenApi(routes: readonly Route[], url: string): Json {
  const paths: Record<string, Json> = {};
  for (const { method, path, spec } of routes) {
    const template = path.replace(/:(\w+)/g, "{$1}");
    const isChange = method !== "get";
    const isCreate = method === "post" && !spec.storesNothing && spec.may !== "public";
    const headers = [
      ...(isCreate
        ? [
            {
              name: "Idempotency-Key",
              in: "header",
              required: true,
              schema: { type: "string", minLength: 8, maxLength: 200 },
            },
          ]
        : []),
      ...(spec.needsRevision
        ? [{ name: "If-Match", in: "header", required: true, schema: { type: "string" } }]
        : []),
      ...(isChange
        ? [
            {
              name: CSRF_HEADER,
              in: "header",
              required: spec.may !== "public",
              description: CSRF_DESCRIPTION,
              schema: { type: "string" },
            },
          ]
        : []),
    ];
    const status = String(spec.status ?? (isCreate ? 201 : 200));
    paths[template] ??= {};
    paths[template][method] = {
      summary: spec.summary,
      operationId: `${method}${template.replace(/[^a-zA-Z0-9]+(.)?/g, (_, next: string | undefined) => (next ?? "").toUpperCase())}`,
      parameters: [
        ...parameters(spec.params, "path"),
        ...parameters(spec.query, "query"),
        ...headers,
      ],
      ...(spec.body
        ? {
            requestBody: {
              required: true,
              content: spec.upload
                ? { "multipart/form-data": { schema: formOf(spec.body, spec.upload) } }
                : { "application/json": { schema: toJson(spec.body, "input") } },
            },
          }
        : {}),
      ...(spec.may === "public"
        ? { security: [] }
        : {
            security: [
              isChange ? { session: [], csrf: [] } : { session: [] },
              ...scopesOpening(`${method.toUpperCase()} ${path}`).map((scope) => ({
                token: [scope],
              })),
            ],
          }),
      responses: {
        [spec.reply ? status : "204"]: spec.reply
          ? {
              description: "Done",
              content: { "application/json": { schema: toJson(spec.reply, "output") } },
            }
          : { description: "Done" },
        default: {
          description: "A problem",
          content: {
            "application/problem+json": { schema: { $ref: "#/components/schemas/Problem" } },
          },
        },
      },
    };
  }
  return {
    openapi: "3.1.0",
    info: {
      title: "Dinward",
      version: "1",
      description: "Occupational noise exposure and hearing protectors.",
    },
    servers: [{ url: `${url}/api` }],
    security: [{ session: [] }],
    paths,
    components: {
      securitySchemes: {
        token: {
          type: "http",
          scheme: "bearer",
          description:
            "Made under one's own account; opens what is named beside it, and nothing else.",
        },
        session: { type: "apiKey", in: "cookie", name: "dinward.sid" },
        csrf: { type: "apiKey", in: "header", name: CSRF_HEADER, description: CSRF_DESCRIPTION },
      },
      schemas: { Problem: toJson(Problem, "output") },
    },
  };
}
