"""Made-up tables as text: the one of the interface, and one whose data are combinations of rows."""

TOML = """\
title    = "Run 1, positrons"
points   = "run1.csv"
measures = "reduced_cross_section"
current  = "neutral"
beam     = "e+"
target   = "proton"
s        = 101124.0
unit     = "1"

[columns]
x = "x"
q2 = "Q2"
value = "sigma"

[[uncertainty]]
column = "stat"
given_in = "percent"
scales_with = "nothing"

[[uncertainty]]
column = "energy scale"
given_in = "percent"
scales_with = "value"
shared_as = "calorimeter"
"""
CSV = """\
x,Q2,sigma,stat,energy scale,remark
0.001,12,1.25,2.0,1.0,first
0.01,12.0,0.80,1.5,-0.5,"second, quoted"
0.1,120,0.50,4,0.25,
"""

STAT = {"column": "stat", "given_in": "value", "scales_with": "nothing"}

RATIO = {
    "rows": {"d": {"target": "deuteron"}, "p": {"target": "proton"}},
    "numerator": {"d": 1},
    "denominator": {"p": 1.0},
}
POINTS = """\
line,x,q2,value,stat
low,0.1,10,,
high,0.2,10,,
bin,0.15,10,0.9,0.1
plain,0.3,10,0.5,0.1
over,0.3,10,1.8,0.2
"""
DESCRIPTION = """\
title = "Bins"
points = "bins.csv"
measures = "F2"
exchange = "photon"
[columns]
label = "line"
[[uncertainty]]
column = "stat"
given_in = "value"
scales_with = "nothing"
[[datum]]
label = "bin"
numerator = { low = 0.25, high = 0.75 }
[[datum]]
label = "over"
numerator = { low = 1.0 }
denominator = { plain = 1.0 }
"""
