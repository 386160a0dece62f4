"""flowgraph: a block-diagram compiler for people who design signal chains."""
