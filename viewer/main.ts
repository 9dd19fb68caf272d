import { Application } from './application.ts';

const application = new Application();
window.vesselwrightViewer = {
  state: () => application.state(),
  picture: (options) => application.picture(options),
  screenOf: (vessel) => application.screenOf(vessel),
};
await application.openPage(new URL(location.href));
