package docs

// Operation is what the pages tell of an operation.
type Operation struct {
	ID       string   `json:"id"`
	Method   string   `json:"method"`
	Path     string   `json:"path"`
	Summary  string   `json:"summary"`
	Forms    []string `json:"forms"`             // media types of the answer
	Query    []string `json:"query"`             // names of query parameters
	InPath   []string `json:"in_path"`           // names of parameters in the path
	Body     bool     `json:"body"`              // takes a JSON document
	Deferred bool     `json:"deferred"`          // may run as a job
	Stage    bool     `json:"takes_stage"`       // its document has a stage
	Example  string   `json:"example,omitempty"` // file name of its examples, "losses.json"
}

// Problem is what the pages tell of a kind of problem.
type Problem struct {
	Kind, Title, Meaning string
	Status               int
	Example              string   // such a body
	From                 []string // operations whose contract declares the status
}

// Quantity is a row of the page of quantities.
type Quantity struct{ Key, Symbol, Unit, Meaning, Source, Group string }

// Pack is a rule pack of the page of rule packs.
type Pack struct {
	ID, Title, Edition, Provenance, Extends string
	Parameters                              []Parameter
	Rules                                   []Rule
	Overrides                               []Override
}

// Parameter is a constant of a pack.
type Parameter struct {
	Name, Meaning          string
	Value, Least, Greatest float64
}

// Rule is one rule of a pack.
type Rule struct{ ID, Title, Severity, Scope, When, Value, Relation, Limit, Unit, Message, Basis string }

// Override is what a derived pack changes.
type Override struct{ Target, Change, Reason string }

// Overview is the first page.
func Overview(version string, operations []Operation, problems []Problem) Sheet {
	return frame{Title: "railproof", Here: "/docs", Body: body("overview.html", map[string]any{
		"Version": version, "Operations": operations, "Problems": problems, "Pages": Pages(),
	})}.sheet(Still)
}

// Console is the page on which requests are sent.
func Console(operations []Operation, rails []string) Sheet {
	return frame{Title: "Try it", Here: "/docs/console", Scripts: []string{"pointer.js", "console.js"}, Wide: true, Body: body("console.html", map[string]any{
		"Operations": operations, "Rails": rails,
	})}.sheet(Live)
}

// Contract is the page that shows the contract.
func Contract() Sheet {
	return frame{Title: "Contract", Here: "/docs/contract", Scripts: []string{"redoc.js", "contract.js"}, Wide: true, Body: body("contract.html", nil)}.sheet(Live)
}

// ProblemSheet is the page of one kind of problem.
func ProblemSheet(p Problem) Sheet {
	return frame{Title: p.Title, Body: body("problem.html", p)}.sheet(Still)
}

// Quantities is the dictionary of quantities; groups follow one another in the
// order of the rows.
func Quantities(rows []Quantity) Sheet {
	type group struct {
		Name string
		Rows []Quantity
	}
	var groups []group
	for _, q := range rows {
		if n := len(groups); n == 0 || groups[n-1].Name != q.Group {
			groups = append(groups, group{Name: q.Group})
		}
		last := &groups[len(groups)-1]
		last.Rows = append(last.Rows, q)
	}
	return frame{Title: "Quantities", Here: "/docs/quantities", Wide: true, Body: body("quantities.html", groups)}.sheet(Still)
}

// RulePacks is the page of rule packs.
func RulePacks(packs []Pack) Sheet {
	return frame{Title: "Rule packs", Here: "/docs/rule-packs", Wide: true, Body: body("rule-packs.html", packs)}.sheet(Still)
}
