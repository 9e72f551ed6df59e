/** What vite makes of imports that are no code. */
declare module '*.css';
declare module '*?url' {
  const address: string;
  export default address;
}
declare module '3dmol/build/3Dmol.es6-min.js' {
  export * from '3dmol';
}
