import * as v from "valibot";
import { answerRequest } from "./answer.ts";
import { REQUEST } from "./protocol.ts";

/** The engine off the screen's thread: poles, loops and accounts take longer than a frame. */
addEventListener("message", (event: MessageEvent<unknown>) => {
  answerRequest(v.parse(REQUEST, event.data), (answer) => postMessage(answer));
});
