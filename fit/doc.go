// Package fit turns readings into a temperature, an emissivity and a statement of how
// far to trust both.
//
// An Estimator is compiled once from bands and assumptions (New). Each reading is then
// estimated by one weighted least-squares problem in which everything known enters with
// its standard uncertainty. The temperature is the only stiff unknown, so the engine is
// one function, the curve χ²(T) with everything else eliminated: its minima are the
// basins, its crossings the interval.
//
//	s_i = ∫R_i(λ) ε(λ) L(λ,T) dλ / ∫R_i dλ · (1 + Σ ρ_ik η_k) + Σ α_ik η_k + noise
//
// # Symbols
//
//	s   reading, W m⁻² sr⁻¹ m⁻¹ (or any one unit, where the level is declared relative)
//	T   temperature, K; β = 1/T
//	ε   emissivity; θ the parameters of its family
//	η   shared inputs in units of their standard uncertainty, N(0, 1)
//	u   standard uncertainty
//
// # What it does not do
//
// It assumes an opaque surface that reflects nothing and fills the field, seen through
// a clear path. It is no safety interlock: what it returns is a reading with a stated
// uncertainty, and the assumptions that it rests on are named beside it.
//
// An Estimator is immutable and safe for concurrent use; a Work is not.
package fit
