// blessed-contrib has types for its root only, which would load all of it.
declare module 'blessed-contrib/lib/widget/canvas.js' {
  const Canvas: unknown;
  export default Canvas;
}
