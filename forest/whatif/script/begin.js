// @ts-check
"use strict";

// The files declare in any order; this runs once all of them have.
queueMicrotask(openDesks);
