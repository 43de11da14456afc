package specs

import (
	"gopkg.in/yaml.v3"
)

func conformationShape() shape[Conformation] {
	return recordShape[Conformation]{name: "a conformation", keys: func() []key[Conformation] {
		return []key[Conformation]{
			with("sites", countShape{0, 64}, func(c *Conformation) *int { return &c.Sites },
				"its sites for the ligand", "sites: 2"),
			with("K", textShape{form: "the name of a constant"},
				func(c *Conformation) *string { return &c.K },
				"the name of its dissociation constant", "K: K_A"),
			with("weight", textShape{form: "the name of a constant"},
				func(c *Conformation) *string { return &c.Weight },
				"the name of its weight; the first conformation has weight 1", "weight: L_I"),
			with("like", textShape{form: "a conformation"},
				func(c *Conformation) *string { return &c.Like },
				"the conformation whose sites and constants it shares", "like: A"),
			with("ligands", namesShape[ConformationLigand]{of: conformationLigandShape(),
				form: "a mapping from effectors to the names of their constants"},
				func(c *Conformation) *[]Named[ConformationLigand] { return &c.Ligands },
				"effectors that bind to it, and the names of their constants",
				"ligands: {alanine: K_ala}"),
		}
	}}
}

func conformationLigandShape() shape[ConformationLigand] {
	return recordShape[ConformationLigand]{name: "a conformation's ligand",
		keys: func() []key[ConformationLigand] {
			return []key[ConformationLigand]{
				with("K", textShape{form: "the name of a constant"},
					func(l *ConformationLigand) *string { return &l.K },
					"the name of its dissociation constant", "K: K_ala").must(),
				with("sites", countShape{1, 64},
					func(l *ConformationLigand) *int { return &l.Sites },
					"its sites on this conformation", "sites: 1"),
			}
		},
		plain: func(r *reader, n *yaml.Node, path string, l *ConformationLigand) bool {
			return textShape{form: "the name of a constant"}.read(r, n, path, &l.K)
		},
		plainSchema: textShape{}.schema}
}

func stateShape() shape[State] {
	return recordShape[State]{name: "a state", keys: func() []key[State] {
		return []key[State]{
			with("name", textShape{form: "a name"}, func(s *State) *string { return &s.Name },
				"its name", "name: ES").must(),
			with("ligands", countShape{0, 64}, func(s *State) *int { return &s.Ligands },
				"how many ligands are bound", "ligands: 1"),
			with("ways", countShape{1, 1 << 30}, func(s *State) *int { return &s.Ways },
				"how many arrangements it stands for", "ways: 2"),
			with("effectors", namesShape[int]{of: countShape{0, 64},
				form: "a mapping from effectors to how many are bound"},
				func(s *State) *[]Named[int] { return &s.Effectors },
				"how many of each effector are bound", "effectors: {alanine: 1}"),
			with("constants", namesShape[float64]{of: anyNumber(),
				form: "a mapping from constants to their exponents"},
				func(s *State) *[]Named[float64] { return &s.Constants },
				"exponents of the constants that multiply its weight", "constants: {K_S: -1}"),
		}
	},
		plain: func(r *reader, n *yaml.Node, path string, s *State) bool {
			return textShape{form: "a state"}.read(r, n, path, &s.Name)
		},
		plainSchema: textShape{}.schema}
}

func stepShape() shape[Step] {
	return recordShape[Step]{name: "a step", keys: func() []key[Step] {
		return []key[Step]{
			with("from", textShape{form: "a state"}, func(s *Step) *string { return &s.From },
				"the state it leaves", "from: E").must(),
			with("to", textShape{form: "a state"}, func(s *Step) *string { return &s.To },
				"the state it reaches", "to: ES").must(),
			with("ligand", countShape{0, 8}, func(s *Step) *int { return &s.Ligand },
				"ligands taken up", "ligand: 1"),
			with("effector", textShape{form: "an effector"},
				func(s *Step) *string { return &s.Effector }, "an effector taken up",
				"effector: alanine"),
			with("rate", textShape{form: "the name of a rate constant"},
				func(s *Step) *string { return &s.Rate }, "the name of its rate constant",
				"rate: k1").must(),
			with("back", textShape{form: "the name of a rate constant"},
				func(s *Step) *string { return &s.Back },
				"the name of the rate constant of the way back; without it there is none",
				"back: k2"),
			with("yields", wordShape{"product"}, func(s *Step) *string { return &s.Yields },
				"what the step sets free", "yields: product"),
		}
	}}
}
