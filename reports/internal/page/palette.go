package page

import (
	"fmt"
	"sort"
	"strings"
)

// A Tone is a colour of the report in its three settings. Print uses Light.
type Tone struct{ Light, Dark string }

// Palette gives each meaning one colour, the same in every report: a colour
// stands for a climate state, for a flux or for a reservoir and for nothing
// else; a curve that needs no telling apart is drawn in ink. Within a group
// the tones differ in lightness as well as in hue, so that they stay apart for
// every kind of colour vision and in grey; palette_test.go holds them to it.
var Palette = map[string]Tone{
	// page
	"paper":  {"#fbfaf6", "#15191c"},
	"panel":  {"#ffffff", "#1b2125"},
	"ink":    {"#1c2529", "#e6e8e4"},
	"quiet":  {"#58636a", "#9faab0"},
	"rule":   {"#d9d8d0", "#353e44"},
	"accent": {"#0f5c66", "#7cc7d0"},
	"alarm":  {"#a1330f", "#f0956b"},

	// climate states
	"state.temperate": {"#58a87e", "#58a87e"},
	"state.snowball":  {"#a9cdf0", "#bcdcf8"},
	"state.moist":     {"#d98a1e", "#d98a1e"},
	"state.runaway":   {"#8c1f12", "#b8402c"},
	"state.beyond":    {"#8a8a96", "#8a8a96"},

	// sources of carbon, then sinks
	"flux.ridge":       {"#2b2d6e", "#5a60c8"},
	"flux.arc":         {"#8258b3", "#9b7bd0"},
	"flux.metamorphic": {"#cdb4e0", "#d9c6ea"},
	"flux.pulse":       {"#d0427a", "#d23c66"},
	"flux.land":        {"#a8631b", "#c07c30"},
	"flux.seafloor":    {"#2c90a3", "#39a7ba"},

	// reservoirs
	"pool.surface":     {"#1f66b5", "#5aa7e0"},
	"pool.seafloor":    {"#3a9a86", "#7fe0c4"},
	"pool.continental": {"#b07a1f", "#d09c48"},
	"pool.mantle":      {"#6b1f2a", "#b5545f"},
	"pool.total":       {"#4b555b", "#a3a9b4"},

	// scenarios side by side
	"series.1": {"#2b2d6e", "#5a60c8"},
	"series.2": {"#a8631b", "#c07c30"},
	"series.3": {"#2c90a3", "#39a7ba"},
	"series.4": {"#d0427a", "#d23c66"},
	"series.5": {"#8258b3", "#9b7bd0"},

	// dates on a map, early to late
	"shade.1": {"#5b1a18", "#f6e3c5"},
	"shade.2": {"#842f22", "#f0c89a"},
	"shade.3": {"#a9482a", "#e4a873"},
	"shade.4": {"#c76538", "#d1875a"},
	"shade.5": {"#dc8551", "#b3694a"},
	"shade.6": {"#e8a775", "#92503f"},
	"shade.7": {"#f0c8a0", "#703a35"},
	"shade.8": {"#f6e4cc", "#4f292b"},

	// the zone
	"zone.inner": {"#8fbf9f", "#3f6b50"},
	"zone.outer": {"#cfe3d4", "#263a2e"},
}

// cssName is the custom property of a tone.
func cssName(role string) string { return "--" + strings.ReplaceAll(role, ".", "-") }

// paletteCSS writes the palette as custom properties for light, dark and print.
func paletteCSS() string {
	roles := make([]string, 0, len(Palette))
	for r := range Palette {
		roles = append(roles, r)
	}
	sort.Strings(roles)
	var light, dark strings.Builder
	for _, r := range roles {
		fmt.Fprintf(&light, "%s:%s;", cssName(r), Palette[r].Light)
		fmt.Fprintf(&dark, "%s:%s;", cssName(r), Palette[r].Dark)
	}
	return ":root{color-scheme:light dark;" + light.String() + "}\n@media screen and (prefers-color-scheme:dark){:root{" + dark.String() + "}}\n"
}

// paletteJSON is the palette for the script: role -> [light, dark].
func paletteJSON() map[string][2]string {
	out := map[string][2]string{}
	for r, t := range Palette {
		out["@"+r] = [2]string{t.Light, t.Dark}
	}
	return out
}
