// Package quality judges what an accelerogram, as it was delivered, may be used for:
// whether its baseline holds, where in the earthquake it begins and ends, and how far it
// stands out of the noise. What conditioning was to mend is assessed again behind it.
//
// Every limit is common practice unless a source stands beside it. Nothing is dropped
// here: a finding says what was measured and against which limit.
package quality
