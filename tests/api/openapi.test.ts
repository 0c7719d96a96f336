import request from "supertest";
import { describe, expect, test } from "vitest";
import { routes } from "../../server/lib/endpoint";
import { testApp } from "../factories";

interface Operation {
  operationId: string;
  summary: string;
  parameters: { name: string; in: string; required: boolean }[];
  requestBody?: { content: Record<string, { schema: object }> };
  responses: Record<string, object>;
}

const fetchDocument = async () => (await request(testApp()).get("/api/openapi.json")).body;

describe("GET /api/openapi.json", () => {
  test("is OpenAPI 3.1 and describes every route, and no other", async () => {
    const document = await fetchDocument();
    expect(document.openapi).toBe("3.1.0");
    const described = Object.entries<Record<string, Operation>>(document.paths).flatMap(
      ([path, operations]) => Object.keys(operations).map((method) => `${method} ${path}`),
    );
    const mounted = routes.map(
      ({ method, path }) => `${method} ${path.replace(/:(\w+)/g, "{$1}")}`,
    );
    expect(described.toSorted()).toEqual(mounted.toSorted());
  });

  test("each operation has its own id, its path's parameters, and its body where one is parsed", async () => {
    const document = await fetchDocument();
    const ids = new Set<string>();
    for (const { method, path, spec } of routes) {
      const template = path.replace(/:(\w+)/g, "{$1}");
      const operation: Operation = document.paths[template][method];
      expect(operation.summary.length, path).toBeGreaterThan(3);
      expect(ids.has(operation.operationId), operation.operationId).toBe(false);
      ids.add(operation.operationId);
      const inPath = operation.parameters
        .filter((one) => one.in === "path")
        .map(({ name }) => name);
      expect(inPath.toSorted(), path).toEqual(
        [...path.matchAll(/:(\w+)/g)].map(([, name]) => name).toSorted(),
      );
      if (spec.body) {
        const kind = spec.upload ? "multipart/form-data" : "application/json";
        expect(operation.requestBody?.content[kind]?.schema, path).toBeTypeOf("object");
      }
      const names = operation.parameters.map(({ name }) => name);
      if (spec.needsRevision) expect(names, path).toContain("If-Match");
      if (method === "post" && !spec.storesNothing && spec.may !== "public")
        expect(names, path).toContain("Idempotency-Key");
    }
  });

  test("every change of a signed-in person names the token it carries, and nothing else does", async () => {
    const document = await fetchDocument();
    expect(document.components.securitySchemes.csrf).toMatchObject({
      type: "apiKey",
      in: "header",
      name: "x-csrf-token",
    });
    expect(document.components.securitySchemes.csrf.description).toContain("dinward.csrf");
    for (const { method, path, spec } of routes) {
      const operation = document.paths[path.replace(/:(\w+)/g, "{$1}")][method];
      const token = operation.parameters.find(
        ({ name }: { name: string }) => name === "x-csrf-token",
      );
      expect(token !== undefined, path).toBe(method !== "get");
      if (method !== "get" && spec.may !== "public")
        expect(operation.security[0], path).toEqual({ session: [], csrf: [] });
    }
  });

  test("every reference in it leads somewhere", async () => {
    const document = await fetchDocument();
    const references = [...JSON.stringify(document).matchAll(/"\$ref":"([^"]+)"/g)].map(
      ([, to = ""]) => to,
    );
    expect(references.length).toBeGreaterThan(10);
    for (const reference of references) {
      expect(reference.startsWith("#/"), reference).toBe(true);
      const found = reference
        .slice(2)
        .split("/")
        .reduce<unknown>(
          (at, name) => (at as Record<string, unknown> | undefined)?.[name],
          document,
        );
      expect(found, reference).toBeDefined();
    }
  });
});
