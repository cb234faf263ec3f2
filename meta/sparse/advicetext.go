package sparse

import "fmt"

// Source names where the choice of a method is said to turn on a fact; "" where
// that is common practice.
func (k FactKind) Source() string {
	switch k {
	case EventRate, ArmRatio, EffectSize:
		return "BMJ 2020;368:l7078; Bradburn et al. 2007, Stat Med 26:53-77; Cochrane Handbook 10.4.4"
	case ZeroCells, SilentTables:
		return "Bradburn et al. 2007, Stat Med 26:53-77; Cochrane Handbook 10.4.4"
	case TotalEvents, ArmEvents:
		return "BMJ 2020;368:l7078"
	case ScatterP:
		return "Cochrane Handbook 10.10.2"
	}
	return ""
}

// mostShown is the odds ratio beyond which a sentence gives no digits: no event
// speaks against it then, or hardly any.
const mostShown = 10000

// Text returns the fact in a sentence.
func (f Fact) Text() string {
	switch f.Kind {
	case EventRate:
		word := "not rare"
		if f.Marked {
			word = "rare"
		}
		return fmt.Sprintf("%.3g%% of all people had the event: %s (limit %.3g%%).", 100*f.Value, word, 100*f.Limit)
	case ArmRatio:
		return fmt.Sprintf("The larger arm has %.3g times the people of the smaller one%s.", f.Value, beyond(f, "unequal beyond %.3g"))
	case EffectSize:
		if f.Value > mostShown {
			return fmt.Sprintf("The common odds ratio, or 1 over it, is above %d%s.", mostShown, beyond(f, "large beyond %.3g"))
		}
		return fmt.Sprintf("The common odds ratio is %.3g, or 1 over that%s.", f.Value, beyond(f, "large beyond %.3g"))
	case ZeroCells:
		return fmt.Sprintf("%.3g%% of the tables have a zero cell.", 100*f.Value)
	case SilentTables:
		return fmt.Sprintf("%.3g%% of the tables carry nothing about a ratio: nobody in them had the event, or everybody.", 100*f.Value)
	case TotalEvents:
		return fmt.Sprintf("There are %.0f events in all%s.", f.Value, beyond(f, "below %.0f large-sample intervals are unreliable"))
	case ArmEvents:
		return fmt.Sprintf("The arms with fewer events have %.0f in all%s.", f.Value, beyond(f, "below %.0f large-sample intervals are unreliable"))
	case TableCount:
		return fmt.Sprintf("Tables that carry information: %.0f%s.", f.Value, beyond(f, "fewer than %.0f say little of the spread between studies"))
	case ScatterP:
		return fmt.Sprintf("The tables scatter about a common odds ratio with p = %.2g%s.", f.Value, beyond(f, "below %.2g one odds ratio may not fit all"))
	}
	return f.Kind.String()
}

// beyond returns a remark in brackets for a marked fact.
func beyond(f Fact, format string) string {
	if !f.Marked {
		return ""
	}
	return " (" + fmt.Sprintf(format, f.Limit) + ")"
}
