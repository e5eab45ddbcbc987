import { contextBridge, ipcRenderer } from "electron";
import { createBridge } from "./ipc-carrier.ts";

contextBridge.exposeInMainWorld("bandwrightHost", createBridge(ipcRenderer));
