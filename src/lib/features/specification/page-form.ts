/** What a form of the request page came back with. */
export interface ReturnedForm {
  form: string;
  message: string;
  fields: Record<string, string>;
  values: Record<string, string>;
}
