// blessed-contrib has types for its root only.
declare module 'blessed-contrib/lib/widget/charts/line.js' {
  const Line: unknown;
  export default Line;
}
