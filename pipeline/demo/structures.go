package demo

// Structure is an invented structure, in words a user would type: each quantity
// is text with its unit. A structure states its period, or its stiffness, from
// which the period follows with the weight.
type Structure struct {
	Name      string
	Period    string // natural period, or ""
	Stiffness string // lateral stiffness, or ""
	Weight    string
	Damping   string // fraction of critical
	Height    string // of the mass above the base
	// MaxBaseShear is the capacity.
	MaxBaseShear string
}

// Structures returns the invented structures, in a fixed order.
func Structures() []Structure {
	return []Structure{
		{Name: "Hesperlin school", Period: "0.45s", Weight: "9500kN", Damping: "5%", Height: "10.8m", MaxBaseShear: "2400kN"},
		{Name: "Ythmere water tank", Period: "1.35s", Weight: "640kN", Damping: "1%", Height: "21m", MaxBaseShear: "110kN"},
		{Name: "Vantrosk footbridge", Stiffness: "2.4kN/mm", Weight: "260kN", Damping: "2%", Height: "5.2m", MaxBaseShear: "60kN"},
		{Name: "Skarvell plant frame", Stiffness: "12kN/mm", Weight: "850kN", Damping: "3%", Height: "7.5m", MaxBaseShear: "320kN"},
		{Name: "Culmarra viaduct", Period: "0.9s", Weight: "14000kN", Damping: "5%", Height: "22m", MaxBaseShear: "2600kN"},
	}
}
