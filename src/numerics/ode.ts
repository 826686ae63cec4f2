/**
 * One step of the classical fourth-order Runge–Kutta method (Kutta 1901) for dy/dt = derivative(y, t).
 * `y` is not changed; the new state is returned. Local error of order dt^5.
 */
export function rk4(
  derivative: (y: readonly number[], t: number) => readonly number[],
  y: readonly number[],
  t: number,
  dt: number,
): number[] {
  const along = (slope: readonly number[], step: number): number[] =>
    y.map((value, i) => value + step * slope[i]);
  const k1 = derivative(y, t);
  const k2 = derivative(along(k1, dt / 2), t + dt / 2);
  const k3 = derivative(along(k2, dt / 2), t + dt / 2);
  const k4 = derivative(along(k3, dt), t + dt);
  return y.map((value, i) => value + (dt / 6) * (k1[i] + 2 * k2[i] + 2 * k3[i] + k4[i]));
}
