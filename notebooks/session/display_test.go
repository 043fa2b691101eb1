package session

import (
	"encoding/json"
	"errors"
	"testing"
)

func TestDisplay(t *testing.T) {
	if err := Display(map[string]interface{}{"text/plain": "x"}); err != nil {
		t.Errorf("without a front end: %v", err)
	}
	failed := errors.New("gone")
	var got []map[string]interface{}
	ConnectDisplay(func(d map[string]interface{}) error { got = append(got, d); return failed })
	if err := Display(map[string]interface{}{"text/plain": "x"}); !errors.Is(err, failed) {
		t.Errorf("error %v", err)
	}
	Report(Progress{Step: "not wanted"})
	t.Setenv(RunnerEnv, "1")
	Report(Progress{Step: "scaling", Index: 2, Steps: 12, Done: 1, Total: 3, Text: "L1"})
	ConnectDisplay(nil)
	Report(Progress{})
	if len(got) != 2 {
		t.Fatalf("%d messages", len(got))
	}
	text, err := json.Marshal(got[1])
	if err != nil || string(text) != `{"application/vnd.thinward.progress+json":{"done":1,"index":2,"step":"scaling","steps":12,"text":"L1","total":3}}` {
		t.Errorf("%s, %v", text, err)
	}
}
