"""The record page: what the register says of a paper, one scan away. Server-made pages without scripts."""
