import { insert, next } from "./insert";

export interface Organization {
  id: string;
}

export async function buildOrganization({
  name = `Organization ${next()}`,
} = {}): Promise<Organization> {
  return { id: await insert("organizations", { name }) };
}
