package synthesis

// Names of the versions of the JSON of a living review's record.
const (
	HistoryFormat = "steelyard-history/1"
	StateFormat   = "steelyard-state/1"
	VerifyFormat  = "steelyard-verify/1"
)

// HistoryDocument is the JSON of the states of a living review, oldest first.
type HistoryDocument struct {
	Format   string          `json:"format"`
	Program  ProgramDocument `json:"program"`
	States   []StateDocument `json:"states"`
	Messages []string        `json:"messages"`
}

// StateReport is the JSON of one state, with its results computed again.
type StateReport struct {
	Format   string        `json:"format"`
	State    StateDocument `json:"state"`
	Results  Document      `json:"results"`
	Messages []string      `json:"messages"`
}

// VerifyDocument is the JSON of a look through the ledger.
type VerifyDocument struct {
	Format    string              `json:"format"`
	Program   ProgramDocument     `json:"program"`
	States    int                 `json:"states"`
	Computed  int                 `json:"computed_again"`
	Intact    bool                `json:"intact"`
	Problems  []ProblemDocument   `json:"problems"`
	Different []DifferentDocument `json:"computed_differently"`
	Caution   string              `json:"caution"`
}

// ProblemDocument is a problem of the ledger; without a line it concerns the folder.
type ProblemDocument struct {
	Line    int    `json:"line,omitempty"`
	Gravity string `json:"gravity"`
	Text    string `json:"text"`
}

// DifferentDocument is a number of a state that this program computes otherwise.
type DifferentDocument struct {
	State int `json:"state"`
	RecomputedDocument
}
