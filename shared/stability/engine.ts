/** Version of the numerical core; it stands on every card and is stored with every revision. */
export const engineVersion = '0.2.0'
