/** Before anything is drawn, so that a dark control room is not lit up by a white page. */
export default defineNuxtPlugin(() => { useThemeStore() })
