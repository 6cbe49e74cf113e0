// For pages that say all in their HTML: documentation, and names of no arm. Left out: everything else.
import { begin, ready } from "./shell.js";

begin();
ready();
