// The model `harbour_account`, compiled by driftwright 0.1.0.
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
pub mod harbour_account {
    //! Harbour savings at a rate that reverts
    //!
    //! A Gaussian short rate with its integral (Vasicek 1977, equations 25 to 27, from memory). Rate and integral are jointly normal, so
    //! the price of a bond, the mean of exp(-I), is exp(-mean(I) + variance(I)/2) in closed form.

    use ::driftwright_runtime as runtime;
    const _: () = runtime::require_version::<runtime::Version<0, 1>>();

    /// The places of the observed quantities among the outputs.
    pub mod quantity {
        /// State `r`: short rate, in `1/year`.
        pub const R: usize = 0;
        /// State `I`: integral of the rate.
        pub const I: usize = 1;
        /// Derived quantity `account`: one crown saved at time 0, `exp(I)`.
        pub const ACCOUNT: usize = 2;
        /// Derived quantity `discount`, `exp(-I)`.
        pub const DISCOUNT: usize = 3;
    }

    /// The parameters of the model.
    #[derive(Clone, Copy, Debug, PartialEq)]
    pub struct Parameters {
        /// `r0`, in `1/year`; in `(-inf, inf)`; 0.05 where not given.
        pub r0: f64,
        /// `kappa`, in `1/year`; in `(0, inf)`; 0.86 where not given.
        pub kappa: f64,
        /// `theta`, in `1/year`; in `(-inf, inf)`; 0.08 where not given.
        pub theta: f64,
        /// `sigma`, in `1/year^(3/2)`; in `(0, inf)`; 0.02 where not given.
        pub sigma: f64,
    }

    impl Default for Parameters {
        /// The model's own values.
        fn default() -> Self {
            Self {
                r0: 0.05,
                kappa: 0.86,
                theta: 0.08,
                sigma: 0.02,
            }
        }
    }

    /// A simulator of `harbour_account`: the model with its parameters.
    #[derive(Clone, Debug)]
    pub struct HarbourAccount {
        parameters: Parameters,
        v10: f64,
        v12: f64,
        v13: f64,
    }

    impl HarbourAccount {
        /// A simulator with these parameters.
        ///
        /// # Errors
        /// A parameter that is not finite or outside its range, an assumption that does not
        /// hold, a state that starts outside its domain, contradictory correlations.
        pub fn new(parameters: Parameters) -> Result<Self, runtime::ParameterError> {
            let r0 = parameters.r0;
            let kappa = parameters.kappa;
            let theta = parameters.theta;
            let sigma = parameters.sigma;
            runtime::check_range(
                "r0",
                parameters.r0,
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
                runtime::Interval::new(f64::NEG_INFINITY, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "sigma",
                parameters.sigma,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            runtime::check_initial(
                "r",
                r0,
                runtime::Interval::new(f64::NEG_INFINITY, false, f64::INFINITY, false),
            )?;
            runtime::check_initial(
                "I",
                0.0,
                runtime::Interval::new(f64::NEG_INFINITY, false, f64::INFINITY, false),
            )?;
            let v10 = -kappa;
            let v12 = kappa * theta;
            let v13 = sigma * sigma;
            Ok(Self { parameters, v10, v12, v13 })
        }

        /// The parameters it was constructed with.
        #[must_use]
        pub const fn parameters(&self) -> &Parameters {
            &self.parameters
        }
    }

    impl runtime::Simulator for HarbourAccount {
        fn shape(&self) -> runtime::Shape<'_> {
            static SOURCES: [runtime::Source; 2] = [
                runtime::Source::new("W"),
                runtime::Source::new("law:I"),
            ];
            static OUTPUTS: [::std::borrow::Cow<'static, str>; 4] = [
                ::std::borrow::Cow::Borrowed("r"),
                ::std::borrow::Cow::Borrowed("I"),
                ::std::borrow::Cow::Borrowed("account"),
                ::std::borrow::Cow::Borrowed("discount"),
            ];
            runtime::Shape {
                states: 2,
                step_values: 8,
                step_scratch: 0,
                sources: &SOURCES,
                outputs: &OUTPUTS,
                observation_values: 0,
                observation_scratch: 0,
                left_domain: None,
                time_dependent: false,
                approximate: false,
            }
        }

        fn start(&self, states: &mut [f64]) {
            let r0 = self.parameters.r0;
            states.copy_from_slice(&[r0, 0.0]);
        }

        fn step_values(
            &self,
            _start: f64,
            length: f64,
            values: &mut [f64],
        ) -> Result<(), runtime::StepError> {
            let v10 = self.v10;
            let v12 = self.v12;
            let v13 = self.v13;
            let mut v14 = ([0.0; 4], [0.0; 2], [0.0; 4]);
            runtime::gauss::linear_transition(
                2,
                &[v10, 0.0, 1.0, 0.0],
                &[v12, 0.0],
                &[v13, 0.0, 0.0, 0.0],
                length,
                &mut v14.0,
                &mut v14.1,
                &mut v14.2,
            )?;
            let v15 = v14.2[0];
            let v16 = v14.2[1];
            let v17 = v14.2[2];
            let v18 = v14.2[3];
            let mut v19 = [0.0; 4];
            runtime::gauss::cholesky(2, &[v15, v16, v17, v18], &mut v19)?;
            // Standard deviation that the normal draw `W` gives r over a step.
            let deviation_r_w = v19[0];
            // Standard deviation that the normal draw `W` gives I over a step.
            let deviation_i_w = v19[2];
            // Standard deviation that the normal draw `law:I` gives I over a step.
            let deviation_i_law_i = v19[3];
            let shift_r = v14.1[0];
            let transition_r_r = v14.0[0];
            let shift_i = v14.1[1];
            let transition_i_r = v14.0[2];
            let transition_i_i = v14.0[3];
            values
                .copy_from_slice(
                    &[
                        deviation_r_w,
                        deviation_i_w,
                        deviation_i_law_i,
                        shift_r,
                        transition_r_r,
                        shift_i,
                        transition_i_r,
                        transition_i_i,
                    ],
                );
            Ok(())
        }

        fn observation_values(
            &self,
            _time: f64,
            _values: &mut [f64],
        ) -> Result<(), runtime::StepError> {
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
            let &[deviation_r_w, deviation_i_w, deviation_i_law_i, shift_r,
            transition_r_r, shift_i, transition_i_r, transition_i_i] = values else {
                unreachable!("the driver passes as many values as the shape says")
            };
            let [slot_r, slot_i] = states else {
                unreachable!("the driver passes as many states as the shape says")
            };
            let [normal_w, normal_law_i] = noise else {
                unreachable!(
                    "the driver passes as many lanes of noise as the shape says"
                )
            };
            for lane in 0..runtime::LANES {
                let state_r = slot_r.0[lane];
                let state_i = slot_i.0[lane];
                let draw_w = normal_w.0[lane];
                let v25 = A::mul_add(deviation_r_w, draw_w, shift_r);
                // d(r) = (kappa*(theta - r)) dt + (sigma) dW, stepped exactly.
                let v27 = A::mul_add(state_r, transition_r_r, v25);
                let v29 = A::mul_add(deviation_i_w, draw_w, shift_i);
                let draw_law_i = normal_law_i.0[lane];
                let v31 = A::mul_add(deviation_i_law_i, draw_law_i, v29);
                let v33 = A::mul_add(state_r, transition_i_r, v31);
                // d(I) = (r) dt, stepped exactly.
                let v35 = A::mul_add(state_i, transition_i_i, v33);
                slot_r.0[lane] = v27;
                slot_i.0[lane] = v35;
            }
        }

        #[inline(always)]
        fn observe<A: runtime::Arith>(
            &self,
            _values: &[f64],
            states: &[runtime::Lane],
            outputs: &mut [runtime::Lane],
            _scratch: &mut [runtime::Lane],
        ) {
            let [slot_r, slot_i] = states else {
                unreachable!("the driver passes as many states as the shape says")
            };
            let [output_r, output_i, output_account, output_discount] = outputs else {
                unreachable!("the driver passes as many outputs as the shape says")
            };
            for lane in 0..runtime::LANES {
                let state_r = slot_r.0[lane];
                let state_i = slot_i.0[lane];
                let v36 = runtime::math::exp::<A>(state_i);
                let v37 = -state_i;
                let v38 = runtime::math::exp::<A>(v37);
                output_r.0[lane] = state_r;
                output_i.0[lane] = state_i;
                output_account.0[lane] = v36;
                output_discount.0[lane] = v38;
            }
        }
    }
}
