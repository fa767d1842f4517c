// The model `honey_market`, compiled by driftwright 0.1.0.
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
pub mod honey_market {
    //! Price of heather honey whose variance comes and goes
    //!
    //! A price with square-root variance (Heston 1993, section 1). The variance is stepped on request by Euler's scheme under full truncation (Lord,
    //! Koekkoek & van Dijk 2010), the price through its logarithm; \`wool\_sale\` draws the same kind of price by its conditional law. The claims are the
    //! drift of the log price, the mean of the variance (Cox, Ingersoll & Ross 1985, equation 19, from memory) and the martingale property of the
    //! discounted price.

    use ::driftwright_runtime as runtime;
    const _: () = runtime::require_version::<runtime::Version<0, 1>>();

    /// The places of the observed quantities among the outputs.
    pub mod quantity {
        /// State `S`: price, in `EUR/hl`.
        pub const S: usize = 0;
        /// State `v`: variance rate of the price, in `1/year`.
        pub const V: usize = 1;
        /// Derived quantity `log_S`, `log(S)`.
        pub const LOG_S: usize = 2;
        /// Readout `call`, `exp(-r*t)*max(S - S0, 0)`.
        pub const CALL: usize = 3;
    }

    /// The parameters of the model.
    #[derive(Clone, Copy, Debug, PartialEq)]
    pub struct Parameters {
        /// `S0`, in `EUR/hl`; in `(0, inf)`; 100.0 where not given.
        pub S0: f64,
        /// `v0`, in `1/year`; in `(0, inf)`; 0.05 where not given.
        pub v0: f64,
        /// `r`, in `1/year`; in `(-inf, inf)`; 0.02 where not given.
        pub r: f64,
        /// `kappa`, in `1/year`; in `(0, inf)`; 3.0 where not given.
        pub kappa: f64,
        /// `theta`, in `1/year`; in `(0, inf)`; 0.06 where not given.
        pub theta: f64,
        /// volatility of the variance, in `1/year`; in `(0, inf)`; 0.25 where not given.
        pub xi: f64,
        /// `rho`; in `[-1, 1]`; -0.6 where not given.
        pub rho: f64,
    }

    impl Default for Parameters {
        /// The model's own values.
        fn default() -> Self {
            Self {
                S0: 100.0,
                v0: 0.05,
                r: 0.02,
                kappa: 3.0,
                theta: 0.06,
                xi: 0.25,
                rho: -0.6,
            }
        }
    }

    /// A simulator of `honey_market`: the model with its parameters.
    #[derive(Clone, Debug)]
    pub struct HoneyMarket {
        parameters: Parameters,
        v16: f64,
        v18: f64,
        v20: f64,
        v40: f64,
        v46: f64,
    }

    impl HoneyMarket {
        /// A simulator with these parameters.
        ///
        /// # Errors
        /// A parameter that is not finite or outside its range, an assumption that does not
        /// hold, a state that starts outside its domain, contradictory correlations.
        pub fn new(parameters: Parameters) -> Result<Self, runtime::ParameterError> {
            let s0 = parameters.S0;
            let v0 = parameters.v0;
            let kappa = parameters.kappa;
            let theta = parameters.theta;
            let xi = parameters.xi;
            let rho = parameters.rho;
            let v51 = kappa * 2.0;
            let v52 = theta * v51;
            let v53 = xi * xi;
            runtime::check_range(
                "S0",
                parameters.S0,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "v0",
                parameters.v0,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "r",
                parameters.r,
                runtime::Interval::new(f64::NEG_INFINITY, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "kappa",
                parameters.kappa,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "theta",
                parameters.theta,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "xi",
                parameters.xi,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "rho",
                parameters.rho,
                runtime::Interval::new(-1.0, true, 1.0, true),
            )?;
            let holds = v53 <= v52;
            if !holds {
                return Err(runtime::ParameterError::Assumption {
                    name: "kept_positive".into(),
                    text: "2*kappa*theta >= xi^2".into(),
                });
            }
            runtime::check_initial(
                "S",
                s0,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            runtime::check_initial(
                "v",
                v0,
                runtime::Interval::new(0.0, true, f64::INFINITY, false),
            )?;
            let mut v14 = [0.0; 4];
            runtime::gauss::cholesky(2, &[1.0, rho, rho, 1.0], &mut v14)
                .map_err(|_| {
                    runtime::ParameterError::CorrelationNotPositiveSemidefinite
                })?;
            let v16 = v14[0];
            let v18 = v14[2];
            let v20 = v14[3];
            let v40 = runtime::math::ln::<runtime::Unfused>(s0);
            let v46 = -s0;
            Ok(Self {
                parameters,
                v16,
                v18,
                v20,
                v40,
                v46,
            })
        }

        /// The parameters it was constructed with.
        #[must_use]
        pub const fn parameters(&self) -> &Parameters {
            &self.parameters
        }
    }

    impl runtime::Simulator for HoneyMarket {
        fn shape(&self) -> runtime::Shape<'_> {
            static SOURCES: [runtime::Source; 2] = [
                runtime::Source::new("W"),
                runtime::Source::new("B"),
            ];
            static OUTPUTS: [::std::borrow::Cow<'static, str>; 4] = [
                ::std::borrow::Cow::Borrowed("S"),
                ::std::borrow::Cow::Borrowed("v"),
                ::std::borrow::Cow::Borrowed("log_S"),
                ::std::borrow::Cow::Borrowed("call"),
            ];
            runtime::Shape {
                states: 2,
                step_values: 5,
                step_scratch: 0,
                sources: &SOURCES,
                outputs: &OUTPUTS,
                observation_values: 1,
                observation_scratch: 0,
                left_domain: None,
                time_dependent: true,
                approximate: true,
            }
        }

        fn start(&self, states: &mut [f64]) {
            let v0 = self.parameters.v0;
            let v40 = self.v40;
            states.copy_from_slice(&[v40, v0]);
        }

        fn step_values(
            &self,
            _start: f64,
            length: f64,
            values: &mut [f64],
        ) -> Result<(), runtime::StepError> {
            let kappa = self.parameters.kappa;
            let v16 = self.v16;
            let v18 = self.v18;
            let v20 = self.v20;
            let v15 = runtime::math::sqrt::<runtime::Unfused>(length);
            let v17 = v15 * v16;
            let v19 = v15 * v18;
            let v21 = v15 * v20;
            let v33 = kappa * length;
            values.copy_from_slice(&[length, v17, v19, v21, v33]);
            Ok(())
        }

        fn observation_values(
            &self,
            time: f64,
            values: &mut [f64],
        ) -> Result<(), runtime::StepError> {
            let r = self.parameters.r;
            let v43 = r * time;
            let v44 = -v43;
            let v45 = runtime::math::exp::<runtime::Unfused>(v44);
            values.copy_from_slice(&[v45]);
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
            let r = self.parameters.r;
            let theta = self.parameters.theta;
            let xi = self.parameters.xi;
            let &[length, v17, v19, v21, v33] = values else {
                unreachable!("the driver passes as many values as the shape says")
            };
            let [slot_s, slot_v] = states else {
                unreachable!("the driver passes as many states as the shape says")
            };
            let [normal_w, normal_b] = noise else {
                unreachable!(
                    "the driver passes as many lanes of noise as the shape says"
                )
            };
            for lane in 0..runtime::LANES {
                let state_s = slot_s.0[lane];
                let state_v = slot_v.0[lane];
                let v24 = runtime::math::max::<A>(state_v, 0.0);
                let v25 = A::mul_add(-0.5, v24, r);
                // Drift of log(S), r - max(u_v, 0)/2, over a step.
                let v26 = A::mul_add(length, v25, state_s);
                let v27 = runtime::math::sqrt::<A>(v24);
                let draw_w = normal_w.0[lane];
                let increment_w = v17 * draw_w;
                // Diffusion of log(S) by W: sqrt(max(u_v, 0)).
                // d(log(S)) = (r - v/2) dt + (sqrt(v)) dW, stepped by full_truncation_euler.
                let v30 = A::mul_add(v27, increment_w, v26);
                let v32 = theta - v24;
                // Drift of v, kappa*(theta - max(u_v, 0)), over a step.
                let v34 = A::mul_add(v32, v33, state_v);
                let v35 = xi * v27;
                let v36 = v19 * draw_w;
                let draw_b = normal_b.0[lane];
                let increment_b = A::mul_add(v21, draw_b, v36);
                // Diffusion of v by B: xi*sqrt(max(u_v, 0)).
                // d(v) = (kappa*(theta - v)) dt + (xi*sqrt(v)) dB, stepped by
                // full_truncation_euler.
                let v39 = A::mul_add(v35, increment_b, v34);
                slot_s.0[lane] = v30;
                slot_v.0[lane] = v39;
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
            let v46 = self.v46;
            let &[v45] = values else {
                unreachable!("the driver passes as many values as the shape says")
            };
            let [slot_s, slot_v] = states else {
                unreachable!("the driver passes as many states as the shape says")
            };
            let [output_s, output_v, output_log_s, output_call] = outputs else {
                unreachable!("the driver passes as many outputs as the shape says")
            };
            for lane in 0..runtime::LANES {
                let state_s = slot_s.0[lane];
                let state_v = slot_v.0[lane];
                let v41 = runtime::math::exp::<A>(state_s);
                let v42 = runtime::math::max::<A>(state_v, 0.0);
                let v47 = v41 + v46;
                let v48 = runtime::math::max::<A>(v47, 0.0);
                let v49 = v45 * v48;
                output_s.0[lane] = v41;
                output_v.0[lane] = v42;
                output_log_s.0[lane] = state_s;
                output_call.0[lane] = v49;
            }
        }
    }
}
