import { StrictMode } from "react";
import { createRoot } from "react-dom/client";
import { connectHost } from "./host/connect.ts";

/** Connects, opens the project to start with, and shows what it is called. */
async function show(): Promise<string> {
  const host = await connectHost();
  const { path } = await host.call("project.launch");
  if (path === null) return "Bandwright";
  return (await host.call("project.open", { path })).project.name;
}

const place = document.getElementById("root");
if (place === null) throw new Error("the page has no place for the screens");
const root = createRoot(place);
try {
  const title = await show();
  root.render(<StrictMode><h1>{title}</h1></StrictMode>);
} catch (error) {
  root.render(<StrictMode><p role="alert">{error instanceof Error ? error.message : String(error)}</p></StrictMode>);
}
