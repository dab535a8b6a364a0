/** The part of s3rver that is used; the package ships no types. */
declare module 's3rver' {
  interface Options {
    port: number;
    address: string;
    directory: string;
    silent: boolean;
    configureBuckets: { name: string; configs: string[] }[];
  }
  export default class S3rver {
    constructor(options: Options);
    run(): Promise<{ port: number; address: string }>;
    close(): Promise<void>;
  }
}
