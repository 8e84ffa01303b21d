package thermal

// MomentKind says which event a moment is counted from.
type MomentKind int

// The events.
const (
	AfterStart     MomentKind = iota // the start of the path
	BeforeEruption                   // the eruption
	StartOf                          // the start of the leg Name
	EndOf                            // the end of the leg Name
	Added                            // the addition of the zone Name to the crystal
)

// Moment is a point of a path as a user writes it: an event and a time from it. It becomes a time only together with a
// history, see History.Moment.
type Moment struct {
	Kind   MomentKind
	Offset float64 // s, positive later: "3 yr before eruption" has -3 yr
	Name   string  // of the leg (StartOf, EndOf) or zone (Added), else empty
	Text   string  // as the user wrote it
}
