package study

import (
	"strings"
	"testing"
)

func TestParseDegrade(t *testing.T) {
	d, err := ParseDegrade([]string{"rates=1/3, 4x ,1", "delays=none,own,+2,+0"})
	if err != nil {
		t.Fatal(err)
	}
	if len(d.Rates) != 2 || d.Rates[0].RatString() != "1/3" || d.Rates[1].RatString() != "4" {
		t.Errorf("rates %v, want 1/3 and 4 (1 is always there)", d.Rates)
	}
	if len(d.Delays) != 2 || !d.Delays[0].None || d.Delays[1].Extra != 2 {
		t.Errorf("delays %v, want none and +2", d.Delays)
	}
	if d, err = ParseDegrade([]string{"rates="}); err != nil || len(d.Rates) != 0 || len(d.Delays) != 2 {
		t.Errorf("an empty list: %v %v, want no rates and the usual delays", d, err)
	}
}

func TestParseDegradeRefuses(t *testing.T) {
	for flag, want := range map[string]string{
		"rates":                             "expected rates=LIST",
		"speeds=2":                          "not a list",
		"rates=0":                           "outside",
		"rates=-2":                          "not a factor",
		"rates=NaN":                         "not a factor",
		"rates=1/0":                         "not a factor",
		"rates=1e999999":                    "not a factor",
		"rates=0x10":                        "not a factor",
		"delays=1":                          "whole ticks",
		"delays=+1.5":                       "whole ticks",
		"delays=+99999999999999999999":      "whole ticks",
		"rates=" + strings.Repeat("2,", 40): "at most",
	} {
		if _, err := ParseDegrade([]string{flag}); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%s: error %v, want one with %q", flag, err, want)
		}
	}
}
