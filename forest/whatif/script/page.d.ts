/** What the script of every report page offers to that of the changed analyses. */

interface PageOutcome {
  id: string;
  title: string;
  studies: { mark?: string; row: number; name: string }[];
  left: { row: number; name: string }[];
}

/** The data of an outcome as it is shown. */
declare function pageOutcome(id: string): PageOutcome;

/** Takes an outcome's new data, and binds its new elements. */
declare function rebindOutcome(outcome: PageOutcome, changed: Element[]): void;

interface Window {
  whatIf: unknown;
}
