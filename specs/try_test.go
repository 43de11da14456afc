package specs

import (
	"encoding/json"
	"fmt"
	"ligancy/specs/diag"
	"os"
	"testing"
)

func TestTry(t *testing.T) {
	dir, name := os.Getenv("TRYDIR"), os.Getenv("TRY")
	if name == "" {
		t.Skip()
	}
	s, l := Load(os.DirFS(dir), name)
	diag.WriteText(os.Stdout, l)
	if s != nil {
		a, _ := s.Build()
		if a != nil && os.Getenv("JSON") != "" {
			for i := range a.Data {
				a.Data[i].Points = a.Data[i].Points[:min(2, len(a.Data[i].Points))]
				a.Data[i].Incubation = 0
			}
			a.Kelvin = 0
			b, err := json.MarshalIndent(a, "", " ")
			fmt.Println(string(b), err)
		}
		if os.Getenv("JSON") != "" {
			b, _ := json.MarshalIndent(s.Defaults, "", " ")
			fmt.Println(string(b))
		}
	}
}
