// Package kinetics gives a mechanism of binding rates, and follows it in time.
//
// A Model is a mechanism and its rate constants: site-level k_on (or k_off) for
// binding, exchange for the change of conformation. The rate back follows from the
// equilibrium constants,
//
//	k_back = k_forward w_from/w_to   (the ligand left out) ,
//
// so that the balance is detailed by construction. At a clamped free ligand x the
// shares p of the states obey dp/dt = Q(x) p: relaxation times come from the
// singular values of Q's square root, shares from scaling and squaring of the
// non-negative matrix Q + μI. Where ligand is used up, or an unlabelled one is added,
// the equations of mass action are integrated by package ode.
//
// Times are in seconds, concentrations in the ligand's unit.
package kinetics
