/** The part of jStat that distributions.ts uses; the package brings no types. */
declare module "jstat" {
  interface Distribution {
    cdf(x: number, ...parameters: number[]): number;
    inv(p: number, ...parameters: number[]): number;
  }
  const jstat: {
    readonly chisquare: Distribution;
    readonly normal: Distribution;
    readonly studentt: Distribution;
    erf(x: number): number;
    gammaln(x: number): number;
  };
  export default jstat;
}
