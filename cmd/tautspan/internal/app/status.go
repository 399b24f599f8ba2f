package app

// Status is how a use case ended; the numbers are the program's exit codes.
type Status int

// The ends. A status is never better than what the document says.
const (
	Done        Status = 0   // and every requirement met
	NotAsAsked  Status = 1   // done, but something is not as asked
	BadInput    Status = 2   // the input is wrong; the document holds at least one error
	Outside     Status = 3   // something outside failed: a file, a limit on memory
	Defect      Status = 4   // a defect in this program
	Interrupted Status = 130 // stopped by the user
)
