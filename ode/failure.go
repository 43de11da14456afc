package ode

import "fmt"

// Reason says why an integration ended early.
type Reason uint8

const (
	// BadInput: the question cannot be answered as put; nothing was integrated.
	BadInput Reason = iota
	// Collapsed: no step, however small, meets the tolerance.
	Collapsed
	// NotFinite: the right-hand side or a derivative is infinite or no number.
	NotFinite
	// WouldBeNegative: a component held non-negative crosses zero at every step size.
	WouldBeNegative
	// StepsSpent: Options.MaxSteps attempts did not reach the end.
	StepsSpent
	// SystemFailed: the System returned an error.
	SystemFailed
	// Cancelled: the context ended.
	Cancelled
)

// Failure is the error of an integration that did not reach its end.
type Failure struct {
	Reason Reason
	// Time is as far as the integration came.
	Time float64
	// Component is the index of the component that stopped it; −1 where none did.
	Component int
	// Step is the last step tried.
	Step float64
	// Err is the error behind it, if any.
	Err error

	name string
}

func (f *Failure) Error() string {
	at := fmt.Sprintf("ode: at t = %.10g ", f.Time)
	switch f.Reason {
	case BadInput:
		return "ode: " + f.Err.Error()
	case Collapsed:
		s := at + fmt.Sprintf("the step collapsed to %.3g", f.Step)
		if f.Component >= 0 {
			s += ": component " + f.name + " cannot be held to its tolerance"
		}
		return s
	case NotFinite:
		if f.Component >= 0 {
			return at + "the derivative of component " + f.name + " is not finite"
		}
		return at + "a derivative is not finite"
	case WouldBeNegative:
		return at + "component " + f.name + " turns negative at every step tried, though it should not"
	case StepsSpent:
		s := at + "the number of steps ran out; the last one was " + fmt.Sprintf("%.3g", f.Step)
		if f.Component >= 0 {
			s += ", held back by component " + f.name
		}
		return s
	case SystemFailed:
		return at + "the system failed: " + f.Err.Error()
	}
	return at + "stopped: " + f.Err.Error()
}

func (f *Failure) Unwrap() error { return f.Err }
