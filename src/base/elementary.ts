export const log = Math.log;
export const exp = Math.exp;
export const sin = Math.sin;
export const cos = Math.cos;
