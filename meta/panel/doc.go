// Package panel turns relative effects into what a guideline panel reads: risks and
// differences at a baseline risk, numbers needed to treat, the information that a
// single adequate trial would need, and what would move a judgement. It computes no
// level of certainty.
package panel
