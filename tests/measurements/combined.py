"""Descriptions of made-up data that are combinations of rows."""

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
