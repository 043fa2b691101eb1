package runner

import (
	"encoding/json"
	"strings"
	"testing"
)

const sample = `{
 "cells": [
  {
   "attachments": {
    "a.png": {}
   },
   "cell_type": "markdown",
   "id": "m1",
   "metadata": {},
   "source": [
    "# Words & <signs>\n",
    "more"
   ]
  },
  {
   "cell_type": "code",
   "execution_count": 3,
   "id": "c1",
   "metadata": {
    "collapsed": true,
    "tags": [
     "parameters"
    ]
   },
   "outputs": [
    {
     "name": "stdout",
     "output_type": "stream",
     "text": [
      "one\n",
      "two\n"
     ]
    },
    {
     "data": {
      "application/json": {
       "b": 1,
       "a": [
        2
       ]
      },
      "image/svg+xml": [
       "<svg/>\n"
      ],
      "text/plain": [
       "x"
      ]
     },
     "execution_count": 3,
     "metadata": {},
     "output_type": "execute_result"
    },
    {
     "ename": "DataError",
     "evalue": "no rows",
     "output_type": "error",
     "traceback": [
      "DataError: no rows"
     ]
    }
   ],
   "source": [
    "n := 1\n",
    "n"
   ]
  },
  {
   "cell_type": "code",
   "execution_count": null,
   "id": "c2",
   "metadata": {},
   "outputs": [],
   "source": []
  }
 ],
 "metadata": {
  "kernelspec": {
   "name": "thinward"
  }
 },
 "nbformat": 4,
 "nbformat_minor": 5
}
`

func TestNotebookRoundTrip(t *testing.T) {
	nb, err := ParseNotebook([]byte(sample))
	if err != nil {
		t.Fatal(err)
	}
	c := nb.Cells[1]
	if c.Source != "n := 1\nn" || !c.HasTag("parameters") || c.Count != 3 || c.Outputs[0].PlainText() != "one\ntwo\n" ||
		c.Outputs[1].TextOf("image/svg+xml") != "<svg/>\n" || c.Outputs[2].PlainText() != "DataError: no rows" {
		t.Errorf("cell %+v", c)
	}
	got, err := nb.Bytes()
	if err != nil {
		t.Fatal(err)
	}
	if string(got) != sample {
		t.Errorf("written as\n%s", got)
	}
}

func TestSourceAsOneString(t *testing.T) {
	text := strings.Replace(sample, "[\n    \"n := 1\\n\",\n    \"n\"\n   ]", `"n := 1\nn"`, 1)
	if text == sample {
		t.Fatal("the sample did not change")
	}
	nb, err := ParseNotebook([]byte(text))
	if err != nil {
		t.Fatal(err)
	}
	if got, err := nb.Bytes(); err != nil || string(got) != sample {
		t.Errorf("%v\n%s", err, got)
	}
}

func TestBadNotebooks(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{"", "no notebook"},
		{"[]", "no notebook"},
		{`{"nbformat": 3}`, "format 3"},
		{`{"nbformat": 4, "cells": [{"cell_type": "odd", "source": ""}]}`, `cell 1 of the file: unknown type "odd"`},
		{`{"nbformat": 4, "cells": [{"cell_type": "code", "source": 5}]}`, "key source"},
		{`{"nbformat": 4, "cells": [{"cell_type": "code", "source": "", "outputs": [{"output_type": "odd"}]}]}`, `unknown output type "odd"`},
	} {
		if _, err := ParseNotebook([]byte(c.text)); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%q: %v", c.text, err)
		}
	}
}

func TestStripAndClone(t *testing.T) {
	nb, err := ParseNotebook([]byte(sample))
	if err != nil {
		t.Fatal(err)
	}
	bare := nb.Clone()
	bare.Strip()
	bare.Cells[1].Metadata["x"] = json.RawMessage("1")
	if nb.Cells[1].Count != 3 || len(nb.Cells[1].Outputs) != 3 || nb.Cells[1].Metadata["x"] != nil {
		t.Error("the copy shares with the original")
	}
	if bare.Cells[1].Count != 0 || bare.Cells[1].Outputs != nil {
		t.Error("outputs are left")
	}
}

func FuzzParseNotebook(f *testing.F) {
	f.Add([]byte(sample))
	f.Add([]byte(`{"nbformat":4,"cells":[{"cell_type":"code","source":["a"],"outputs":[{"output_type":"stream","text":"x"}]}]}`))
	f.Fuzz(func(t *testing.T, text []byte) {
		nb, err := ParseNotebook(text)
		if err != nil {
			return
		}
		once, err := nb.Bytes()
		if err != nil {
			t.Fatal(err)
		}
		again, err := ParseNotebook(once)
		if err != nil {
			t.Fatalf("what was written is not read: %v", err)
		}
		if twice, err := again.Bytes(); err != nil || string(twice) != string(once) {
			t.Fatalf("written differently: %v\n%s\n%s", err, once, twice)
		}
	})
}
