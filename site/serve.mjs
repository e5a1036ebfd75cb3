// Serves the built page on loopback and prints where it is.
import { readFileSync } from "node:fs";
import { createServer } from "node:http";
import { fileURLToPath } from "node:url";

const path = fileURLToPath(new URL("dist/preponder.html", import.meta.url));
const server = createServer((req, res) => {
  if (new URL(req.url, "http://x").pathname !== "/") {
    res.writeHead(404).end();
    return;
  }
  res.writeHead(200, { "content-type": "text/html; charset=utf-8" }).end(readFileSync(path));
});
server.listen(Number(process.env.PORT ?? 0), "127.0.0.1", () => {
  console.log(`Preponder is at http://127.0.0.1:${server.address().port}/`);
  console.log(`The same page without a server: open ${path}`);
});
