package plan

// SchemaName and SchemaVersion stand in every plan.json.
const (
	SchemaName    = "springbound/plan"
	SchemaVersion = 1
)
