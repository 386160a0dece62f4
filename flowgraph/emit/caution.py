"""The caution that stands at the head of emitted programs."""

CAUTION = (
    "The tool that printed this is an aid for a qualified engineer and no certified tool. Where the result",
    "can hurt someone (hearing, motion, medical or vehicle functions), the applicable functional-safety",
    "standard, local code and licensed practice decide. Try audio at low level first, drives without load.",
)
