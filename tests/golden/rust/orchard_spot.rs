// The model `orchard_spot`, compiled by driftwright 0.1.0.
// Change the model file rather than this one: it is written anew whenever the model changes.

#[forbid(unsafe_code)]
#[allow(
    dead_code,
    non_snake_case,
    unreachable_pub,
    clippy::approx_constant,
    clippy::doc_markdown,
    clippy::excessive_precision,
    clippy::float_cmp,
    clippy::inline_always,
    clippy::let_and_return,
    clippy::many_single_char_names,
    clippy::needless_range_loop,
    clippy::similar_names,
    clippy::too_many_lines,
    clippy::unreadable_literal
)]
pub mod orchard_spot {
    //! Spot price of cider apples, one factor
    //!
    //! Geometric Brownian motion. The claims are the drift of its logarithm and its log-normal law with mean and variance
    //! (Black & Scholes 1973, section 2; Hull 2018, sections 14.7 and 15.1), from memory.

    use ::driftwright_runtime as runtime;
    const _: () = runtime::require_version::<runtime::Version<0, 1>>();

    /// The places of the observed quantities among the outputs.
    pub mod quantity {
        /// State `S`: spot price, in `EUR/t`.
        pub const S: usize = 0;
        /// Derived quantity `log_S`: log price, `log(S)`.
        pub const LOG_S: usize = 1;
        /// Derived quantity `square_root`: square root of the price, `sqrt(S)`.
        pub const SQUARE_ROOT: usize = 2;
        /// Readout `call`: discounted payoff of the press's right to buy, `exp(-mu*t)*max(S - strike, 0)`.
        pub const CALL: usize = 3;
    }

    /// The parameters of the model.
    #[derive(Clone, Copy, Debug, PartialEq)]
    pub struct Parameters {
        /// `S0`; in `(-inf, inf)`; 42.0 where not given.
        pub S0: f64,
        /// growth rate, in `1/year`; in `(-inf, inf)`; 0.05 where not given.
        pub mu: f64,
        /// volatility, in `1/year^(1/2)`; in `(0, inf)`; 0.2 where not given.
        pub sigma: f64,
        /// price at which the press may buy, in `EUR/t`; in `(0, inf)`; 40.0 where not given.
        pub strike: f64,
    }

    impl Default for Parameters {
        /// The model's own values.
        fn default() -> Self {
            Self {
                S0: 42.0,
                mu: 0.05,
                sigma: 0.2,
                strike: 40.0,
            }
        }
    }

    /// A simulator of `orchard_spot`: the model with its parameters.
    #[derive(Clone, Debug)]
    pub struct OrchardSpot {
        parameters: Parameters,
        drift_s: f64,
        v18: f64,
        v26: f64,
    }

    impl OrchardSpot {
        /// A simulator with these parameters.
        ///
        /// # Errors
        /// A parameter that is not finite or outside its range, an assumption that does not
        /// hold, a state that starts outside its domain, contradictory correlations.
        pub fn new(parameters: Parameters) -> Result<Self, runtime::ParameterError> {
            let s0 = parameters.S0;
            let mu = parameters.mu;
            let sigma = parameters.sigma;
            let strike = parameters.strike;
            runtime::check_range(
                "S0",
                parameters.S0,
                runtime::Interval::new(f64::NEG_INFINITY, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "mu",
                parameters.mu,
                runtime::Interval::new(f64::NEG_INFINITY, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "sigma",
                parameters.sigma,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "strike",
                parameters.strike,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            runtime::check_initial(
                "S",
                s0,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            let v11 = sigma * sigma;
            let v12 = 0.5 * v11;
            // Constant part of the drift of log(S): mu - sigma^2/2.
            let drift_s = mu - v12;
            let v18 = runtime::math::ln::<runtime::Unfused>(s0);
            let v26 = -strike;
            Ok(Self {
                parameters,
                drift_s,
                v18,
                v26,
            })
        }

        /// The parameters it was constructed with.
        #[must_use]
        pub const fn parameters(&self) -> &Parameters {
            &self.parameters
        }
    }

    impl runtime::Simulator for OrchardSpot {
        fn shape(&self) -> runtime::Shape<'_> {
            static SOURCES: [runtime::Source; 1] = [runtime::Source::new("W")];
            static OUTPUTS: [::std::borrow::Cow<'static, str>; 4] = [
                ::std::borrow::Cow::Borrowed("S"),
                ::std::borrow::Cow::Borrowed("log_S"),
                ::std::borrow::Cow::Borrowed("square_root"),
                ::std::borrow::Cow::Borrowed("call"),
            ];
            runtime::Shape {
                states: 1,
                step_values: 2,
                step_scratch: 0,
                sources: &SOURCES,
                outputs: &OUTPUTS,
                observation_values: 1,
                observation_scratch: 0,
                left_domain: None,
                time_dependent: true,
                approximate: false,
            }
        }

        fn start(&self, states: &mut [f64]) {
            let v18 = self.v18;
            states.copy_from_slice(&[v18]);
        }

        fn step_values(
            &self,
            _start: f64,
            length: f64,
            values: &mut [f64],
        ) -> Result<(), runtime::StepError> {
            let sigma = self.parameters.sigma;
            let drift_s = self.drift_s;
            let v9 = runtime::math::sqrt::<runtime::Unfused>(length);
            // Standard deviation that the normal draw `W` gives log(S) over a step.
            let deviation_s_w = sigma * v9;
            // What the constant drift adds to log(S) over a step.
            let shift_s = length * drift_s;
            values.copy_from_slice(&[deviation_s_w, shift_s]);
            Ok(())
        }

        fn observation_values(
            &self,
            time: f64,
            values: &mut [f64],
        ) -> Result<(), runtime::StepError> {
            let mu = self.parameters.mu;
            let v23 = mu * time;
            let v24 = -v23;
            let v25 = runtime::math::exp::<runtime::Unfused>(v24);
            values.copy_from_slice(&[v25]);
            Ok(())
        }

        #[inline(always)]
        fn step<A: runtime::Arith>(
            &self,
            values: &[f64],
            states: &mut [runtime::Lane],
            noise: &[runtime::Lane],
            _draws: &runtime::random::Draws,
            _scratch: &mut [runtime::Lane],
        ) {
            let &[deviation_s_w, shift_s] = values else {
                unreachable!("the driver passes as many values as the shape says")
            };
            let [slot_s] = states else {
                unreachable!("the driver passes as many states as the shape says")
            };
            let [normal_w] = noise else {
                unreachable!(
                    "the driver passes as many lanes of noise as the shape says"
                )
            };
            for lane in 0..runtime::LANES {
                let state_s = slot_s.0[lane];
                let draw_w = normal_w.0[lane];
                let v16 = A::mul_add(deviation_s_w, draw_w, shift_s);
                // d(log(S)) = (mu - sigma^2/2) dt + (sigma) dW, stepped exactly.
                let v17 = state_s + v16;
                slot_s.0[lane] = v17;
            }
        }

        #[inline(always)]
        fn observe<A: runtime::Arith>(
            &self,
            values: &[f64],
            states: &[runtime::Lane],
            outputs: &mut [runtime::Lane],
            _scratch: &mut [runtime::Lane],
        ) {
            let v26 = self.v26;
            let &[v25] = values else {
                unreachable!("the driver passes as many values as the shape says")
            };
            let [slot_s] = states else {
                unreachable!("the driver passes as many states as the shape says")
            };
            let [output_s, output_log_s, output_square_root, output_call] = outputs else {
                unreachable!("the driver passes as many outputs as the shape says")
            };
            for lane in 0..runtime::LANES {
                let state_s = slot_s.0[lane];
                let v19 = runtime::math::exp::<A>(state_s);
                let v20 = state_s * 0.5;
                let v21 = runtime::math::exp::<A>(v20);
                let v27 = v19 + v26;
                let v28 = runtime::math::max::<A>(v27, 0.0);
                let v29 = v25 * v28;
                output_s.0[lane] = v19;
                output_log_s.0[lane] = state_s;
                output_square_root.0[lane] = v21;
                output_call.0[lane] = v29;
            }
        }

        fn law(
            &self,
            state: usize,
            before: f64,
            _start: f64,
            length: f64,
        ) -> Option<Box<dyn runtime::law::Law>> {
            match state {
                quantity::S => {
                    let mu = self.parameters.mu;
                    let sigma = self.parameters.sigma;
                    let v11 = sigma * sigma;
                    let v12 = 0.5 * v11;
                    // Constant part of the drift of log(S): mu - sigma^2/2.
                    let drift_s = mu - v12;
                    let v32 = runtime::math::ln::<runtime::Unfused>(before);
                    let v33 = drift_s * length;
                    let v34 = v32 + v33;
                    let v35 = v11 * length;
                    let v36 = runtime::math::sqrt::<runtime::Unfused>(v35);
                    Some(Box::new(runtime::law::Lognormal::new(v34, v36)))
                }
                _ => None,
            }
        }
    }
}
