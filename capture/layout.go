package capture

// A Layout says how a file was understood.
type Layout struct {
	// Encoding is the character encoding, for example "UTF-8".
	Encoding string
	// Compressed is true when the bytes were gzip.
	Compressed bool
	// Sideways is true of a table with a line for each channel. HeaderLine, UnitsLine,
	// FirstLine and FooterLine then count columns, and the numbers of Columns lines.
	Sideways bool
	// Preamble is the number of lines before the header or the data.
	Preamble int
	// HeaderLine and UnitsLine are the line numbers of the names row and of the
	// units row, counted from 1; 0 where there is none.
	HeaderLine, UnitsLine int
	// FirstLine is the line of the first sample, counted from 1.
	FirstLine int
	// FooterLine is the line below the samples from which on words stand that are
	// not read; 0 where there are none.
	FooterLine int
	// Delimiter is the separator in words, for example "comma".
	Delimiter string
	// DecimalMark is "." or ",".
	DecimalMark string
	// Columns tells the role of every column of the data, in order.
	Columns []Column
}

// A Column is one column of the data block.
type Column struct {
	// Number counts from 1; in a table that lies on its side it is that of the line.
	Number int
	// Name and Unit are as the file gives them.
	Name, Unit string
	// Role is what the reader took it for.
	Role Role
	// Why says in words what decided the role.
	Why string
}

// A Role is what a column holds.
type Role string

// The roles of columns.
const (
	RoleTime      Role = "time"
	RoleIndex     Role = "index"
	RoleChannel   Role = "channel"
	RoleDeviation Role = "deviation"
	RoleLogic     Role = "logic"
	RoleText      Role = "text"
	RoleMetadata  Role = "metadata"
	RoleDuplicate Role = "duplicate"
	RoleBlank     Role = "blank"
)
