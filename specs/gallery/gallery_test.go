package gallery

import (
	"io/fs"
	"testing"
)

func TestFiles(t *testing.T) {
	for _, name := range Names() {
		for _, ext := range []string{".yaml", ".csv"} {
			if _, err := fs.Stat(Files(name), name+ext); err != nil {
				t.Error(err)
			}
		}
	}
	if Files("zebra") != nil || Files("../gallery") != nil {
		t.Error("there are files of a study that does not exist")
	}
}
