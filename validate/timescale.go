package validate

// A timeScale is a unit that times are written in.
type timeScale struct {
	unit    string
	seconds float64
}

// scaleOf is minutes from ten on, hours from one on.
func scaleOf(seconds float64) timeScale {
	switch {
	case seconds >= 3600:
		return timeScale{"h", 3600}
	case seconds >= 600:
		return timeScale{"min", 60}
	}
	return timeScale{"s", 1}
}

// cell writes a time without its unit, which stands in the column's head.
func (s timeScale) cell(seconds *float64) string {
	if seconds == nil {
		return "-"
	}
	return number(*seconds / s.seconds)
}

// longest is the largest of the times that are known.
func longest(times ...*float64) float64 {
	most := 0.0
	for _, t := range times {
		if t != nil && !bad(*t) {
			most = max(most, *t)
		}
	}
	return most
}
