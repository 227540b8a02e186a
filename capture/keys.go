package capture

import (
	"bytes"
	"strings"
)

// A meaning is what an entry of a preamble tells.
type meaning int

const (
	meansNothing meaning = iota
	meansInterval
	meansRate
	meansStart
	meansTrigger // index of the sample at time zero
	meansTimeUnit
	meansValueUnit
	meansSource // name of the channel
	meansCount  // number of samples
	meansScale  // what a converter code is worth
	meansDivision
	meansDivisionCodes
	meansZeroCode
	meansFrequencyUnit
	meansSegments   // number of records in the file
	meansDecimation // samples taken for each that is kept
	meansOther      // nothing that is wanted
)

// meanings gives the meaning of the keys of preambles, folded.
var meanings = map[string]meaning{}

func init() {
	for m, keys := range map[meaning]string{
		meansInterval: `sampleinterval samplinginterval sampleperiod samplingperiod samplingtime sampletime timeinterval
			timepersample secondspersample timestep timeincrement timedelta increment xincrement xinc xincr incr horizontalinterval xinterval xstep xspacing deltat δt dt deltax xdelta
			ts interval sp samplespacing timespacing tinc hresolution timeresolution
			abtastintervall abtastzeit abtastperiode périodeéchantillonnage périodedéchantillonnage`,
		meansRate: `samplerate samplingrate samplefrequency samplingfrequency samplingfreq fs samplespersecond sr acquisitionrate sampling
			abtastrate abtastfrequenz fréquencedéchantillonnage`,
		meansStart:         `start starttime t0 x0 tstart xstart tzero xzero xorigin timeorigin timezero firstsample timeoffirstsample horizontalstart xfirst`,
		meansTrigger:       `triggerpoint triggersample triggerindex triggerposition pretriggersamples pretriggerpoints`,
		meansTimeUnit:      `horizontalunits horizontalunit timeunit timeunits xunit xunits timebaseunit unitoftime xunitlabel`,
		meansValueUnit:     `verticalunits verticalunit unit units yunit yunits voltageunit valueunit amplitudeunit channelunit yunitlabel unitlabel einheit unité`,
		meansSource:        `source channel trace channelname tracename signal kanal`,
		meansCount:         `recordlength points samples numberofpoints numberofsamples recordsize memorylength npoints datapoints numpoints`,
		meansScale:         `ymult ymultiplier yincrement yinc lsb lsbsize verticalmultiplier countscale`,
		meansFrequencyUnit: `frequencyunit frequencyunits unitoffrequency frequenzeinheit`,
		meansSegments:      `segments numberofsegments segmentcount nsegments numsegments frames numberofframes framecount numframes`,
		meansDecimation:    `decimation decimationfactor downsampling downsample downsamplingfactor subsampling`,
		meansOther:         `xdimension ydimension xquantity yquantity dimension`,
		meansZeroCode:      `zerocode zerocount zerocounts codeofzero codeatzero countsatzero zerovoltcode zerovoltcount zerolevelcode zerolevelcount zerolsb`,
	} {
		for _, k := range strings.Fields(keys) {
			meanings[k] = m
		}
	}
}

// readKey reads "key", "key: value", "key = value" and "key value", the key
// with or without its unit in brackets.
func readKey(text string) (e entry, rest string, ok bool) {
	key := text
	if i := strings.IndexAny(text, ":="); i > 0 {
		key, rest = text[:i], strings.TrimSpace(text[i+1:])
	}
	for {
		name, u, _ := splitUnit(key)
		if m := meanings[fold(name)]; m != meansNothing && len(strings.TrimSpace(name)) < 40 {
			return entry{means: m, unit: u}, rest, true
		}
		if e, ok := perKey(key); ok {
			return e, rest, true
		}
		// Shorten a free text by its last word, which may be the value.
		i := strings.LastIndexByte(strings.TrimSpace(key), ' ')
		if i < 0 || rest != "" && key == text {
			return entry{}, "", false
		}
		rest = strings.TrimSpace(key[i:] + " " + rest)
		key = key[:i]
		if !strings.ContainsAny(rest[:1], "0123456789+-.") && !isUnit(rest) {
			return entry{}, "", false
		}
	}
}

// isEntry reports a comment that tells something as preambles do: # rows: 60. Where no
// time falls, it is all that tells the next table from the rows above.
func isEntry(text []byte) bool {
	key, _, found := bytes.Cut(stripComment(text), []byte{':'})
	return found && isComment(text) && len(key) > 1 && len(key) < 30 && key[0]|0x20 >= 'a' && key[0]|0x20 <= 'z'
}

func isUnit(text string) bool {
	_, ok := parseUnit(text)
	return ok
}
