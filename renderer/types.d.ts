/** What vite makes of imports that are no code. */
declare module '*.css';
declare module '*?url' {
  const address: string;
  export default address;
}
